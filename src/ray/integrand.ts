import { interpretProgram } from '../formula/javascript.ts';
import { Graph, type NodeId } from '../formula/graph.ts';
import { lowerGraph, type Program } from '../formula/lower.ts';
import { coordinateSubstitution, type Vector } from '../formula/vector-calculus.ts';
import type { SplineGrid } from '../math/spline-grid.ts';
import type { Table } from '../math/table.ts';
import type { Scene } from '../scene/types.ts';
import { freeFreeOpacity, opaqueBrightness, type FreeFree } from './free-free.ts';
import { fieldMoments } from './field-moments.ts';
import { fluxFactor } from './flux-scale.ts';
import { orderedSteps } from './ordered-moments.ts';
import { findRiceTable, riceTableShape } from './rice.ts';
import { sceneGrids } from './grids.ts';
import { parameterValues, SceneGraph } from './scene-graph.ts';
import { brightnessPerKpc, faradayDepthPerKpc } from './synchrotron.ts';

/**
 * A scene made into one function of a point. Outputs of `program`, in order: dφ/ds (rad m^-2 per
 * kpc), dΣ/ds (rad² m^-4 per kpc), then the moments ⟨B^q⟩, ⟨B^q cos2θ⟩ and ⟨B^q sin2θ⟩ (uG^q, θ
 * from the receding half of the major axis towards the minor axis, of the electric vector), the
 * emission measure (pc cm^-6 per kpc), and C (cm^-3) of each emission group. Lanes are x, y, z (kpc, galaxy frame).
 */
export interface Integrand {
  readonly program: Program;
  /** Which frequencies share a C: one group for all where no layer depends on frequency. */
  readonly groupOf: readonly number[];
  readonly groups: number;
  readonly hasDispersion: boolean;
  /** Whether thermal gas absorbs and emits. */
  readonly hasAbsorption: boolean;
  /** Run-time values for a scene of the same structure: parameters of `program`, tables, grids, edges. */
  inputs(scene: Scene): IntegrandInputs;
}

export interface IntegrandInputs {
  readonly parameters: Float64Array;
  readonly tables: readonly Table[];
  readonly grids: readonly SplineGrid[];
  /** Length of a panel at most, kpc, for the sake of the grids. */
  readonly longestPanelKpc: number;
  /** Opacity and brightness of thermal gas per frequency; there where the integrand `hasAbsorption`. */
  readonly freeFree?: FreeFree;
  /** Heights and radii (kpc) where rays must break their panels, beside the plane and the axis. */
  readonly edges: { readonly zKpc: readonly number[]; readonly rKpc: readonly number[] };
}

/** Fixed places of the outputs; C of the first emission group stands at `firstGroup`. */
export const output = { faraday: 0, dispersion: 1, total: 2, cosine: 3, sine: 4, emissionMeasure: 5, firstGroup: 6 } as const;

/** What all tables of an integrand are like. */
export const tableShape = riceTableShape;

/** A frequency at which to follow rays, and the centre of the channel it belongs to, Hz. */
export interface SpectralPoint {
  readonly frequencyHz: number;
  /** Decides the height of layers that depend on frequency. */
  readonly centreHz: number;
}

/**
 * Compiles a scene for a list of frequencies. Parameters stay run-time inputs: a scene that
 * differs only in numbers needs new `inputs`, not a new integrand.
 */
export function compileIntegrand(scene: Scene, spectrum: readonly SpectralPoint[]): Integrand {
  const graph = new Graph();
  const { outputs, groupOf, groupFrequenciesHz, hasDispersion, hasAbsorption } = integrandNodes(graph, new SceneGraph(graph, scene), scene, spectrum);
  const program = lowerGraph(graph, outputs, ['x', 'y', 'z'], coordinateSubstitution(graph));
  return {
    program,
    groupOf,
    groups: groupFrequenciesHz.length,
    hasDispersion,
    hasAbsorption,
    inputs: (values) => ({ ...integrandInputs(program, values, groupFrequenciesHz), ...(values.freeFree && { freeFree: freeFreeOf(values, spectrum) }) }),
  };
}

/** A scene's integrand as nodes of a graph. */
export interface IntegrandNodes {
  /** In the order of an integrand's outputs. */
  readonly outputs: readonly NodeId[];
  readonly groupOf: readonly number[];
  readonly groupFrequenciesHz: readonly number[];
  readonly hasDispersion: boolean;
  readonly hasAbsorption: boolean;
}

/** Builds the integrand of a scene for a list of frequencies. */
export function integrandNodes(graph: Graph, fields: SceneGraph, scene: Scene, spectrum: readonly SpectralPoint[]): IntegrandNodes {
  const [bx, by, bz] = fields.totalField();
  const electrons = fields.electronDensity();

  // Turn the field into the observer's frame: along k̂ and along the two axes of the sky.
  const [sinI, cosI] = [graph.parameter('sinI'), graph.parameter('cosI')];
  const towardsObserver = ([, y, z]: Vector): NodeId => graph.subtract(graph.multiply(z, cosI), graph.multiply(y, sinI));
  const towardsMinor = ([, y, z]: Vector): NodeId => graph.add(graph.multiply(y, cosI), graph.multiply(z, sinI));
  const field: Vector = [bx, by, bz];
  const faraday = graph.multiply(graph.constant(faradayDepthPerKpc), electrons, towardsObserver(field));

  const rms = fields.unresolvedRms();
  const ordered = fields.orderedField();
  const dispersion = fields.dispersion(ordered && towardsObserver(ordered));
  const emissionMeasure = scene.freeFree ? fields.emissionMeasure() : graph.constant(0);
  const moments = fieldMoments(graph, {
    major: bx,
    minor: towardsMinor(field),
    ...(rms !== undefined && { rms }),
    ...(ordered && { ordered: { major: ordered[0], minor: towardsMinor(ordered), steps: orderedSteps(scene.cosmicRays.index, scene.numerics.tolerance).count } }),
  });
  const groupOf = emissionGroups(scene, spectrum);
  const groups = Math.max(...groupOf) + 1;
  const normalisations = Array.from({ length: groups }, (_, group) => fields.cosmicRays(group));
  return {
    outputs: [faraday, dispersion, ...moments, emissionMeasure, ...normalisations],
    groupOf,
    groupFrequenciesHz: Array.from({ length: groups }, (_, group) => spectrum[groupOf.indexOf(group)].centreHz),
    hasDispersion: rms !== undefined || ordered !== undefined,
    hasAbsorption: scene.freeFree !== undefined,
  };
}

function emissionGroups(scene: Scene, spectrum: readonly SpectralPoint[]): readonly number[] {
  const depends = scene.cosmicRays.layers.some((layer) => layer.heightIndex !== undefined);
  if (!depends) return spectrum.map(() => 0);
  const distinct = [...new Set(spectrum.map((point) => point.centreHz))];
  return spectrum.map((point) => distinct.indexOf(point.centreHz));
}

/**
 * Values of every run-time parameter by name, the factor of `scaleTo` among them. Throws InputError
 * where a scene with `scaleTo` emits nothing.
 */
export function sceneValues(scene: Scene, groupFrequenciesHz: readonly number[]): ReadonlyMap<string, number> {
  const factor = fluxFactor(scene, { compile: compileIntegrand, total: output.total, firstGroup: output.firstGroup, tableShape });
  return new Map([...parameterValues(scene, groupFrequenciesHz), ['cosmicRays/scale', factor]]);
}

/** Run-time inputs of a program made from a scene's integrand; `rates` are values of parameters that are no numbers of the scene. */
export function integrandInputs(
  program: Program,
  scene: Scene,
  groupFrequenciesHz: readonly number[],
  rates: ReadonlyMap<string, number> = new Map(),
): IntegrandInputs {
  const values = sceneValues(scene, groupFrequenciesHz);
  const parameters = Float64Array.from(program.parameters, (name) => {
    const value = values.get(name) ?? rates.get(name);
    if (value === undefined) throw new Error(`parameter ${name} has no value`);
    return value;
  });
  const tables = program.tables.map((name) => findRiceTable(name, scene.cosmicRays.index));
  return { parameters, tables, ...gridInputs(program, scene), edges: edgeValues(scene, values) };
}

/** The grids that a program reads, and how long panels may be beside them. */
export function gridInputs(program: Program, scene: Scene): Pick<IntegrandInputs, 'grids' | 'longestPanelKpc'> {
  const known = sceneGrids(scene);
  const used = program.grids.map((name) => {
    const grid = known.get(name);
    if (!grid) throw new Error(`the grid ${name} has no data`);
    return grid;
  });
  return { grids: used.map(({ grid }) => grid), longestPanelKpc: Math.min(Infinity, ...used.map(({ panelKpc }) => panelKpc)) };
}

/** Thermal gas at each frequency, its brightness in the unit of a ray's sums: that of C = 1 cm^-3 in 1 uG along 1 kpc. */
function freeFreeOf({ freeFree, cosmicRays }: Scene, spectrum: readonly SpectralPoint[]): FreeFree {
  const temperature = freeFree?.temperatureK ?? 0;
  const perFrequency = (compute: (frequencyHz: number) => number): Float64Array => Float64Array.from(spectrum, ({ frequencyHz }) => compute(frequencyHz));
  return {
    opacity: perFrequency((frequency) => freeFreeOpacity(temperature, frequency)),
    source: perFrequency((frequency) => opaqueBrightness(temperature, frequency) / brightnessPerKpc(cosmicRays.index, frequency)),
  };
}

/** Evaluates the declared edges, which depend on parameters alone. */
function edgeValues(scene: Scene, values: ReadonlyMap<string, number>): IntegrandInputs['edges'] {
  const graph = new Graph();
  const { z, r } = new SceneGraph(graph, scene).edges();
  if (z.length + r.length === 0) return { zKpc: [], rKpc: [] };
  const program = lowerGraph(graph, [...z, ...r], []);
  const numbers = interpretProgram(program, Float64Array.from(program.parameters, (name) => values.get(name) ?? NaN), []);
  return { zKpc: numbers.slice(0, z.length), rKpc: numbers.slice(z.length) };
}
