import { armsProblem, holeProblem } from '../model/modulation.ts';
import type { Model } from '../model/types.ts';
import { InputError } from '../units/input-error.ts';
import { keys, oneOf } from '../units/schema.ts';
import { placeAt, type YamlInput, type YamlPath } from '../units/yaml-input.ts';
import { limited, sceneLimits, type SceneLimit } from './limits.ts';
import type { ComponentShape } from './types.ts';

/** Keys that modulate any component: spiral arms, a flaring height, a central hole. */
export const shapeKeys = {
  arms: keys({
    number: limited(sceneLimits.armNumber),
    pitch: limited(sceneLimits.armPitch),
    width: limited(sceneLimits.armWidth),
    amplitude: limited(sceneLimits.armAmplitude),
    phase: limited(sceneLimits.armPhase).default(0),
    reference: limited(sceneLimits.armReference),
    innerRadius: limited(sceneLimits.armInnerRadius),
  }).optional(),
  flare: keys({
    law: oneOf(['exponential', 'linear'], 'law').default('exponential'),
    radius: limited(sceneLimits.flareRadius),
    reference: limited(sceneLimits.flareReference).default(0),
  }).optional(),
  hole: keys({ radius: limited(sceneLimits.holeRadius) }).optional(),
};

/** Key of clumps, for thermal electrons. */
export const fillingKey = { filling: limited(sceneLimits.filling).optional() };

/** What the schema of `shapeKeys` and `fillingKey` makes of a component's keys. */
interface GivenShape {
  readonly arms?: { number: number; pitch: number; width: number; amplitude: number; phase: number; reference: number; innerRadius: number };
  readonly flare?: { law: 'exponential' | 'linear'; radius: number; reference: number };
  readonly hole?: { radius: number };
  readonly filling?: number;
}

/** The modulation of a component. Throws InputError with its place where the model cannot have it. */
export function readShape(input: YamlInput, path: YamlPath, model: Model, given: Readonly<Record<string, unknown>>): ComponentShape {
  const { arms, flare, hole, filling } = given as GivenShape;
  const fail = (key: string, reason: string): never => {
    throw new InputError(`"${key}" cannot be used with "${model.name}": ${reason}`, placeAt(input, path, key));
  };
  const armsReason = arms && armsProblem(model.formulas);
  if (armsReason !== undefined) fail('arms', armsReason);
  if (arms) checkArmWidth(arms.number, arms.width, (reason) => { throw new InputError(reason, placeAt(input, [...path, 'arms', 'width'])); });
  const holeReason = hole && holeProblem(model.formulas);
  if (holeReason !== undefined) fail('hole', holeReason);
  if (flare && !model.parameters.some(({ name }) => name === 'height')) fail('flare', 'it has no parameter "height" that could grow');
  return {
    ...(arms && { arms: { number: arms.number, pitch: arms.pitch, width: arms.width, phase: arms.phase, amplitude: arms.amplitude, referenceKpc: arms.reference, innerRadiusKpc: arms.innerRadius } }),
    ...(flare && { flare: { law: flare.law, radiusKpc: flare.radius, referenceKpc: flare.reference } }),
    ...(hole && { hole: { radiusKpc: hole.radius } }),
    ...(filling !== undefined && { filling }),
  };
}

/** Arms are at most as wide as the space between them: half the distance of two ridges. */
function checkArmWidth(number: number, width: number, fail: (reason: string) => never): void {
  const widest = 180 / number;
  if ((width * 180) / Math.PI > widest * (1 + 1e-12)) fail(`arms of ${((width * 180) / Math.PI).toPrecision(4)} deg are too wide for ${number}: at most ${widest.toPrecision(4)} deg each (full width at half maximum)`);
}

/** A number of a component's modulation: its key in paths, and how it is read and written. */
export interface ShapeEntry extends SceneLimit {
  readonly key: string;
  read(shape: ComponentShape): number | undefined;
  write(shape: ComponentShape, value: number): ComponentShape;
}

/** Every number of a modulation. */
export const shapeEntries: readonly ShapeEntry[] = [
  armEntry('number', sceneLimits.armNumber, 'number'),
  armEntry('pitch', sceneLimits.armPitch, 'pitch'),
  armEntry('width', sceneLimits.armWidth, 'width'),
  armEntry('phase', sceneLimits.armPhase, 'phase'),
  armEntry('amplitude', sceneLimits.armAmplitude, 'amplitude'),
  armEntry('reference', sceneLimits.armReference, 'referenceKpc'),
  armEntry('innerRadius', sceneLimits.armInnerRadius, 'innerRadiusKpc'),
  { key: 'flare.radius', ...sceneLimits.flareRadius, read: ({ flare }) => flare?.radiusKpc, write: (old, radiusKpc) => (old.flare ? { flare: { ...old.flare, radiusKpc } } : {}) },
  { key: 'flare.reference', ...sceneLimits.flareReference, read: ({ flare }) => flare?.referenceKpc, write: (old, referenceKpc) => (old.flare ? { flare: { ...old.flare, referenceKpc } } : {}) },
  { key: 'hole.radius', ...sceneLimits.holeRadius, read: ({ hole }) => hole?.radiusKpc, write: (_, radiusKpc) => ({ hole: { radiusKpc } }) },
  { key: 'filling', ...sceneLimits.filling, read: ({ filling }) => filling, write: (_, filling) => ({ filling }) },
];

function armEntry(key: string, limit: SceneLimit, name: keyof NonNullable<ComponentShape['arms']>): ShapeEntry {
  return {
    key: `arms.${key}`,
    ...limit,
    read: ({ arms }) => arms?.[name],
    write: ({ arms }, value) => {
      if (!arms) return {};
      const changed = { ...arms, [name]: value };
      checkArmWidth(changed.number, changed.width, (reason) => { throw new InputError(`arms.${key}: ${reason}`); });
      return { arms: changed };
    },
  };
}
