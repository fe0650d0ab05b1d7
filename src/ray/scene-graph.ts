import { steadySineCosine } from '../math/steady.ts';
import type { Graph, NodeId } from '../formula/graph.ts';
import { cartesianFromCylindrical, coordinatesOf, type Vector } from '../formula/vector-calculus.ts';
import { buildDensity, buildEdges, buildField, type ModelUse } from '../model/build-model.ts';
import { armExcess, armSharpness, flaredHeight, holeFactor, type Modulation } from '../model/modulation.ts';
import { shapeEntries } from '../scene/shape.ts';
import type { Component, CosmicRayLayer, ResolvedTurbulence, Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import { equipartitionElectrons } from './equipartition.ts';
import { smallestFieldSquared } from './field-size.ts';
import { emissionMeasurePerKpc } from './free-free.ts';
import { orderedSteps } from './ordered-moments.ts';
import { electronFactor, formulaProfile, resolvedField, turbulenceValues } from './turbulence-graph.ts';
import { faradayDepthPerKpc } from './synchrotron.ts';

/** One use of a model in a scene: the path its run-time parameters are known by. */
export interface PlacedComponent {
  readonly path: string;
  readonly component: Component;
}

/** Every field and density of a scene with a path of its own, in the order of the scene. */
export function placedComponents(scene: Scene): {
  readonly field: readonly PlacedComponent[];
  readonly thermalElectrons: readonly PlacedComponent[];
  readonly cosmicRays: readonly PlacedComponent[];
} {
  const place = (section: string, list: readonly Component[]): PlacedComponent[] =>
    list.map((component) => ({ path: `${section}/${component.name}`, component }));
  return {
    field: place('field', scene.field),
    thermalElectrons: place('thermalElectrons', scene.thermalElectrons),
    cosmicRays: place('cosmicRays', scene.cosmicRays.layers),
  };
}

/** The parts of a scene as nodes of one graph, each component built once. */
export class SceneGraph {
  private readonly fieldsByName = new Map<string, Vector>();
  private field: Vector | undefined;

  /** `kept`: run-time parameters that stay in the graph although they are unused. */
  constructor(
    private readonly graph: Graph,
    private readonly scene: Scene,
    private readonly kept: ReadonlySet<string> = new Set(),
  ) {}

  totalField(): Vector {
    return (this.field ??= this.sumOfFields());
  }

  private sumOfFields(): Vector {
    const parts = placedComponents(this.scene).field.map((placed) => {
      const field = buildField(this.graph, this.use(placed));
      this.fieldsByName.set(placed.component.name, field);
      return field;
    });
    const turbulent = this.turbulentField();
    if (turbulent) parts.push(turbulent);
    const sum = (axis: 0 | 1 | 2): NodeId => this.graph.add(...parts.map((part) => part[axis]));
    return [sum(0), sum(1), sum(2)];
  }

  /** Resolved turbulence, uG; undefined where there is none. */
  turbulentField(): Vector | undefined {
    const { resolved } = this.scene.turbulence;
    return resolved && resolvedField(this.graph, resolved.cells, this.turbulenceProfile(resolved));
  }

  /** What the resolved field's potential, and the rms of what is not resolved of it, are multiplied by. */
  private turbulenceProfile({ follows, profile }: ResolvedTurbulence): NodeId {
    if (follows !== undefined) return this.profileOf(follows, 'resolved');
    return profile === undefined ? this.graph.constant(1) : formulaProfile(this.graph, profile);
  }

  electronDensity(): NodeId {
    const mean = this.graph.add(...placedComponents(this.scene).thermalElectrons.map((placed) => buildDensity(this.graph, this.use(placed))));
    return this.graph.multiply(mean, this.electronFluctuation());
  }

  /** n_e of one component of the thermal electrons, or of all, cm^-3: what gas follows. */
  gasDensity(name: string | undefined): NodeId {
    const placed = placedComponents(this.scene).thermalElectrons.find(({ component }) => component.name === name);
    return placed ? this.graph.multiply(buildDensity(this.graph, this.use(placed)), this.electronFluctuation()) : this.electronDensity();
  }

  /** What resolved turbulence makes of n_e: a factor of mean 1. */
  private electronFluctuation(): NodeId {
    const { resolved } = this.scene.turbulence;
    return resolved?.electrons ? electronFactor(this.graph, resolved.cells) : this.graph.constant(1);
  }

  /**
   * ⟨n_e²⟩, cm^-6. Clumps of a component with filling factor f raise ⟨n²⟩ to ⟨n⟩²/f; those of
   * different components are independent (own definition).
   */
  private electronDensitySquared(): NodeId {
    const { graph } = this;
    const clumps = placedComponents(this.scene).thermalElectrons.filter(({ component }) => component.filling !== undefined);
    const excess = clumps.map((placed) => {
      const rise = graph.subtract(graph.power(graph.parameter(`${placed.path}/filling`), -1), graph.constant(1));
      return graph.multiply(graph.power(buildDensity(graph, this.use(placed)), 2), rise, graph.power(this.electronFluctuation(), 2));
    });
    return graph.add(graph.power(this.electronDensity(), 2), ...excess);
  }

  /** dEM/ds of thermal gas, pc cm^-6 per kpc. */
  emissionMeasure(): NodeId {
    return this.graph.multiply(this.graph.constant(emissionMeasurePerKpc), this.electronDensitySquared());
  }

  /** C of the cosmic-ray electrons at the frequencies of an emission group. */
  cosmicRays(group: number): NodeId {
    if (this.scene.cosmicRays.equipartition) return this.equipartition();
    const layers = placedComponents(this.scene).cosmicRays.map((placed) => {
      const layer = placed.component as CosmicRayLayer;
      const height = layer.heightIndex === undefined ? undefined : this.graph.parameter(`${placed.path}/height@${group}`);
      return buildDensity(this.graph, this.use(placed, height));
    });
    return this.scaled(layers);
  }

  /** C with layers that depend on frequency at their reference frequency. */
  cosmicRaysAtReference(): NodeId {
    if (this.scene.cosmicRays.equipartition) return this.equipartition();
    return this.scaled(placedComponents(this.scene).cosmicRays.map((placed) => buildDensity(this.graph, this.use(placed))));
  }

  private scaled(layers: readonly NodeId[]): NodeId {
    const sum = this.graph.add(...layers);
    return this.scene.cosmicRays.scaleTo ? this.graph.multiply(this.graph.parameter('cosmicRays/scale'), sum) : sum;
  }

  /** C in equipartition with the mean square of the whole field: cells are too small to hold electrons of their own (Beck & Krause 2005). */
  private equipartition(): NodeId {
    const { graph } = this;
    const square = (node: NodeId): NodeId => graph.power(node, 2);
    const rms = this.unresolvedRms();
    const parts = [...this.totalField(), ...(this.orderedField() ?? [])].map(square);
    const random = rms === undefined ? [] : [graph.multiply(graph.constant(3), square(rms))];
    return graph.multiply(graph.parameter('cosmicRays/equipartition'), graph.add(...parts, ...random));
  }

  /** rms of one component of the unresolved field, uG, or undefined where there is none. */
  unresolvedRms(): NodeId | undefined {
    const parts = this.unresolvedParts();
    if (parts.length < 2) return parts[0]?.rms;
    return this.graph.power(this.graph.add(...parts.map(({ rms }) => this.graph.power(rms, 2))), 0.5);
  }

  /** Random fields that are not resolved, independent of one another: rms of a component, uG, and cells, kpc. */
  private unresolvedParts(): readonly { readonly rms: NodeId; readonly cell: NodeId }[] {
    const { graph } = this;
    const { unresolved, resolved } = this.scene.turbulence;
    const parts: { rms: NodeId; cell: NodeId }[] = [];
    if (unresolved) {
      const rms = graph.parameter('turbulence/rms');
      parts.push({ rms: unresolved.follows === undefined ? rms : graph.multiply(rms, this.profileOf(unresolved.follows, 'unresolved')), cell: graph.parameter('turbulence/cell') });
    }
    if (resolved) parts.push({ rms: graph.multiply(graph.parameter('resolved/rest'), this.turbulenceProfile(resolved)), cell: graph.parameter('resolved/restCell') });
    return parts;
  }

  /** The ordered random field: its rms times the unit vector along which it changes sign, uG; undefined where there is none. */
  orderedField(): Vector | undefined {
    const { graph } = this;
    const { ordered } = this.scene.turbulence;
    if (!ordered) return undefined;
    const strength = graph.parameter('ordered/rms');
    const rms = ordered.follows === undefined ? strength : graph.multiply(strength, this.profileOf(ordered.follows, 'ordered'));
    const zero = graph.constant(0);
    const [radial, azimuthal] = ordered.along === 'azimuth' ? [zero, rms] : (['sin', 'cos'] as const).map((name) => graph.multiply(rms, graph.unary(name, graph.parameter('ordered/pitch'))));
    return cartesianFromCylindrical(graph, coordinatesOf(graph), [radial, azimuthal, zero]);
  }

  /** A named component's value over its strength, or a density's over its amplitude. */
  private profileOf(name: string, key: 'unresolved' | 'ordered' | 'resolved'): NodeId {
    const { field, thermalElectrons, cosmicRays } = placedComponents(this.scene);
    const fieldPart = field.find((placed) => placed.component.name === name);
    if (fieldPart) {
      const [x, y, z] = this.fieldsByName.get(name) ?? buildField(this.graph, this.use(fieldPart));
      const size = this.graph.power(this.graph.add(...[x, y, z].map((part) => this.graph.power(part, 2)), this.graph.constant(smallestFieldSquared)), 0.5);
      return this.graph.divide(size, this.graph.unary('abs', this.amplitude(fieldPart, 'strength', key)));
    }
    const density = [...thermalElectrons, ...cosmicRays].find((placed) => placed.component.name === name);
    if (!density) throw new InputError(`turbulence.${key}.follows: no component or density is named "${name}"`);
    return this.graph.divide(buildDensity(this.graph, this.use(density)), this.amplitude(density, 'density', key));
  }

  private amplitude(placed: PlacedComponent, name: string, key: 'unresolved' | 'ordered' | 'resolved'): NodeId {
    if (!(name in placed.component.parameters)) {
      throw new InputError(`turbulence.${key}.follows: "${placed.component.name}" has no parameter ${name} to be measured by; name a component that has one`);
    }
    return this.graph.parameter(`${placed.path}/${name}`);
  }

  /**
   * dΣ/ds of fields that are not resolved, per kpc: K² ⟨n_e²⟩ Σ σ_∥² d over isotropic turbulence and the
   * ordered field's part along the line of sight (Burn 1966; Sokoloff et al. 1998).
   */
  dispersion(orderedAlong: NodeId | undefined): NodeId {
    const { graph } = this;
    const walks = this.unresolvedParts().map(({ rms, cell }) => graph.multiply(graph.power(rms, 2), cell));
    if (orderedAlong !== undefined) walks.push(graph.multiply(graph.power(orderedAlong, 2), graph.parameter('ordered/cell')));
    if (walks.length === 0) return graph.constant(0);
    return graph.multiply(graph.constant(faradayDepthPerKpc ** 2), this.electronDensitySquared(), graph.add(...walks));
  }

  /** A component's model with its run-time parameters and what modulates it; `height` takes the place of its own. */
  use(placed: PlacedComponent, height?: NodeId): ModelUse {
    const { path, component } = placed;
    const plain = this.plainUse(placed);
    if (!component.flare && height === undefined) return { ...plain, modulation: this.modulation(placed) };
    const parameters = new Map(plain.parameters);
    const given = height ?? this.graph.parameter(`${path}/height`);
    const own = (name: string): NodeId => this.graph.parameter(`${path}/${name}`);
    parameters.set('height', component.flare ? flaredHeight(this.graph, component.flare.law, given, own('flare.radius'), own('flare.reference')) : given);
    return { ...plain, parameters, modulation: this.modulation(placed) };
  }

  private plainUse({ path, component }: PlacedComponent): ModelUse {
    const parameters = new Map(
      Object.keys(component.parameters).map((name) => {
        const key = `${path}/${name}`;
        return [name, isUnused(component, name) && !this.kept.has(key) ? this.graph.constant(0) : this.graph.parameter(key)];
      }),
    );
    return { model: component.model, parameters, choices: component.choices, path };
  }

  private modulation({ path, component }: PlacedComponent): Modulation {
    const own = (name: string): NodeId => this.graph.parameter(`${path}/${name}`);
    const arm = (name: string): NodeId => own(`arms.${name}`);
    return {
      ...(component.hole && { hole: holeFactor(this.graph, own('hole.radius')) }),
      ...(component.arms && {
        arms: armExcess(this.graph, {
          number: arm('number'),
          pitch: arm('pitch'),
          sharpness: arm('sharpness'),
          phase: arm('phase'),
          amplitude: arm('amplitude'),
          reference: arm('reference'),
          innerRadius: arm('innerRadius'),
        }),
      }),
    };
  }

  /** Edges declared by every component, as nodes of parameters alone. */
  edges(): { readonly z: readonly NodeId[]; readonly r: readonly NodeId[] } {
    const { field, thermalElectrons, cosmicRays } = placedComponents(this.scene);
    const all = [...field, ...thermalElectrons, ...cosmicRays].map((placed) => buildEdges(this.graph, this.plainUse(placed)));
    return { z: all.flatMap((edges) => edges.z), r: all.flatMap((edges) => edges.r) };
  }
}

/** Whether an optional parameter is at its default of 0: what it would change is left out of the code. */
export function isUnused(component: Component, name: string): boolean {
  return component.parameters[name] === 0 && component.model.parameters.some((parameter) => parameter.name === name && parameter.default === 0);
}

/** Values of every run-time parameter by name, in the units formulas see. */
export function parameterValues(scene: Scene, groupFrequenciesHz: readonly number[]): ReadonlyMap<string, number> {
  const values = new Map<string, number>();
  const { field, thermalElectrons, cosmicRays } = placedComponents(scene);
  for (const { path, component } of [...field, ...thermalElectrons, ...cosmicRays]) {
    for (const [name, value] of Object.entries(component.parameters)) values.set(`${path}/${name}`, value);
    for (const { key, read } of shapeEntries) {
      const value = read(component);
      if (value !== undefined) values.set(`${path}/${key}`, value);
    }
    if (component.arms) values.set(`${path}/arms.sharpness`, armSharpness(component.arms.number, component.arms.width));
  }
  for (const { path, component } of cosmicRays) {
    const layer = component as CosmicRayLayer;
    if (layer.heightIndex === undefined || layer.heightAtHz === undefined) continue;
    for (const [group, frequency] of groupFrequenciesHz.entries()) {
      values.set(`${path}/height@${group}`, layer.parameters.height * Math.pow(frequency / layer.heightAtHz, -layer.heightIndex));
    }
  }
  const [sinI, cosI] = exactSineCosine(scene.galaxy.inclination);
  values.set('sinI', sinI).set('cosI', cosI);
  values.set('halfPower', (scene.cosmicRays.index + 1) / 4);
  values.set('turbulence/rms', scene.turbulence.unresolved?.rmsUG ?? 0);
  values.set('turbulence/cell', scene.turbulence.unresolved?.cellKpc ?? 0);
  const { equipartition, index } = scene.cosmicRays;
  if (equipartition) values.set('cosmicRays/equipartition', equipartitionElectrons(index, equipartition.protonRatio));
  const { ordered } = scene.turbulence;
  if (ordered) {
    const { start, step, weight } = orderedSteps(index, scene.numerics.tolerance);
    values.set('ordered/rms', ordered.rmsUG).set('ordered/cell', ordered.cellKpc).set('ordered/pitch', ordered.pitch);
    values.set('ordered/start', start).set('ordered/step', step).set('ordered/weight', weight);
  }
  for (const [name, value] of turbulenceValues(scene)) values.set(name, value);
  return values;
}

/** sin and cos of an angle, exact at whole multiples of a right angle. */
export function exactSineCosine(angle: number): readonly [number, number] {
  const quarter = angle / (Math.PI / 2);
  const nearest = Math.round(quarter);
  if (Math.abs(quarter - nearest) < 1e-14) {
    const [sine, cosine] = [[0, 1], [1, 0], [0, -1], [-1, 0]][((nearest % 4) + 4) % 4];
    return [sine, cosine];
  }
  return steadySineCosine(angle);
}
