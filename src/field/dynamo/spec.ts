import { FormulaError } from '../../formula/parse.ts';
import { InputError } from '../../units/input-error.ts';
import { checkVersion, checkYaml, placeAt, type YamlInput, type YamlPath } from '../../units/yaml-input.ts';
import { isSymmetric, type DynamoProblem } from './problem.ts';
import { compileProfile, makeProfile, parameterValue, type ProfileScope } from './profile-formula.ts';
import type { DynamoProfiles, Profile } from './profiles.ts';
import { angularSpeedOf, type RotationCurve } from './rotation-curve.ts';
import { dynamoSchema, type DynamoFile } from './spec-schema.ts';
import { windProfiles } from './wind.ts';

/** A checked file of the dynamo. */
export interface DynamoSpec {
  readonly title: string;
  readonly problem: DynamoProblem;
  /** Largest relative error that is let pass. */
  readonly tolerance: number;
  /** Largest |B_phi| of a mode, uG. */
  readonly strengthUG: number;
  readonly thinDisc?: { readonly radiiKpc: readonly number[]; readonly halfThicknessKpc: number };
  /** What a user should hear, such as a curve that ends within the volume. */
  readonly notes: readonly string[];
}

/** Names that formulas know already. */
const taken = ['r', 'z', 'Omega', 'shear', 'l', 'u', 'h', 'pi', 'e', 'i'];

/**
 * Reads the dynamo's file; `openCurve` reads a rotation curve's file. Throws InputError with its place:
 * wrong keys and quantities, formulas that fail, profiles that are not finite or of the wrong sign.
 */
export function readDynamoSpec(input: YamlInput, openCurve: (file: string) => RotationCurve): DynamoSpec {
  checkVersion(input, 'gyrelight-dynamo', 1);
  const file = checkYaml(input, dynamoSchema);
  const { volume, solve, grid, thinDisc } = file;
  const { cell, speed, height } = file.turbulence;
  for (const key of ['radial', 'vertical'] as const) {
    if (grid[key] % 2 !== 0) refuse(input, ['grid', key], `${grid[key]} cells cannot be halved for the second grid: an even number is wanted`);
  }
  if (solve.strength !== undefined && solve.state !== 'mode') refuse(input, ['solve', 'strength'], 'a saturated field has a strength of its own: "strength" belongs to "state: mode"');
  const base: ProfileScope = { constants: { l: cell, u: speed, h: height, ...readParameters(input, file.parameters) }, define: {} };
  const { angularSpeed, notes } = readRotation(input, file, base, openCurve);
  const scope: ProfileScope = { ...base, define: file.define, angularSpeed };
  Object.entries(file.define).forEach(([name, text], k, all) => {
    checkName(input, name, ['define', name]);
    placed(input, ['define', name], () => compileProfile(text, { ...scope, define: Object.fromEntries(all.slice(0, k)) }));
  });
  const read = (path: YamlPath, text: string | number, unit: string): Profile => placed(input, path, () => makeProfile(text, unit, scope));
  const profiles: DynamoProfiles = {
    angularSpeed,
    alpha: read(['alpha'], file.alpha, 'km/s'),
    diffusivity: read(['diffusivity'], file.diffusivity, 'kpc km/s'),
    ...placed(input, ['wind'], () => windProfiles(file.wind, (key, text) => read(['wind', key], text, 'km/s'))),
    equipartition: read(['equipartition'], file.equipartition, 'uG'),
  };
  checkProfiles(input, file, profiles);
  const surroundings = { radiusKpc: volume.radius, heightKpc: volume.height, ratio: file.surroundings.ratio };
  return {
    title: file.title,
    problem: {
      profiles,
      surroundings,
      grid: { radiusKpc: volume.radius, heightKpc: volume.height, radialCells: grid.radial / 2, verticalCells: grid.vertical / 2, reach: file.surroundings.reach },
      parities: chooseParities(input, file, profiles),
      modes: solve.modes,
      state: solve.state,
    },
    tolerance: solve.tolerance,
    strengthUG: solve.strength ?? 1,
    ...(thinDisc && { thinDisc: { radiiKpc: thinDisc.radii, halfThicknessKpc: thinDisc.halfThickness ?? height } }),
    notes,
  };
}

function readParameters(input: YamlInput, given: DynamoFile['parameters']): Record<string, number> {
  return Object.fromEntries(
    Object.entries(given).map(([name, text]) => {
      const path: YamlPath = ['parameters', name];
      if (!/^[A-Za-z][A-Za-z0-9]{0,39}$/.test(name)) refuse(input, path, `"${name}" is no name: a letter, then letters and digits are wanted, 40 at most`);
      checkName(input, name, path);
      return [name, placed(input, path, () => parameterValue(text))];
    }),
  );
}

function checkName(input: YamlInput, name: string, path: YamlPath): void {
  if (taken.includes(name)) refuse(input, path, `the name "${name}" already means something else in formulas`);
}

function readRotation(input: YamlInput, { rotation, volume }: DynamoFile, scope: ProfileScope, openCurve: (file: string) => RotationCurve): { angularSpeed: Profile; notes: string[] } {
  const { file, radius, speed, angularSpeed } = rotation;
  const given = [file, radius ?? (typeof speed === 'string' ? speed : undefined), angularSpeed].filter((value) => value !== undefined);
  if (given.length !== 1 || (radius !== undefined) !== Array.isArray(speed)) {
    refuse(input, ['rotation'], 'one of "file", lists "radius" and "speed", a formula "speed" or a formula "angularSpeed" is wanted');
  }
  if (angularSpeed !== undefined) return { angularSpeed: placed(input, ['rotation', 'angularSpeed'], () => compileProfile(angularSpeed, scope)), notes: [] };
  if (typeof speed === 'string') {
    const formula = placed(input, ['rotation', 'speed'], () => compileProfile(speed, scope));
    // On the axis the speed's slope counts: the formula is read a little beside it.
    const least = 1e-6 * volume.radius;
    return { angularSpeed: (r, z) => formula(Math.max(r, least), z) / Math.max(r, least), notes: [] };
  }
  const curve = file === undefined ? { radiiKpc: radius ?? [], speedsKms: speed ?? [] } : placed(input, ['rotation', 'file'], () => openCurve(file));
  const last = curve.radiiKpc[curve.radiiKpc.length - 1];
  const notes = last < volume.radius ? [`The rotation curve ends at ${last} kpc; its last speed is kept beyond.`] : [];
  return { angularSpeed: placed(input, ['rotation'], () => angularSpeedOf(curve)), notes };
}

/** Looks at every profile over the volume and a little beyond, axis and plane included. */
function checkProfiles(input: YamlInput, { volume, rotation }: DynamoFile, profiles: DynamoProfiles): void {
  const rotationKey = rotation.angularSpeed === undefined ? (rotation.file === undefined ? 'speed' : 'file') : 'angularSpeed';
  const checks: readonly (readonly [keyof DynamoProfiles, YamlPath, string, boolean])[] = [
    ['angularSpeed', ['rotation', rotationKey], 'km/s/kpc', false],
    ['alpha', ['alpha'], 'km/s', false],
    ['diffusivity', ['diffusivity'], 'kpc km/s', true],
    ['windRadial', ['wind', 'radial'], 'km/s', false],
    ['windVertical', ['wind', 'vertical'], 'km/s', false],
    ['equipartition', ['equipartition'], 'uG', true],
  ];
  for (const [key, path, unit, isPositive] of checks) {
    for (let a = 0; a <= 48; a++) {
      for (let b = -48; b <= 48; b++) {
        const [r, z] = [(a / 40) * volume.radius, (b / 48) * (volume.height + 0.2 * volume.radius)];
        const value = profiles[key](r, z);
        if (Number.isFinite(value) && (!isPositive || value > 0)) continue;
        const allowed = isPositive ? 'more than 0' : 'a finite number';
        refuse(input, path, `${key} is ${Number.isFinite(value) ? `${value} ${unit}` : value} at r = ${Number(r.toPrecision(4))} kpc, z = ${Number(z.toPrecision(4))} kpc; allowed is ${allowed}, there and everywhere up to a fifth of the radius beyond the volume`);
      }
    }
  }
}

function chooseParities(input: YamlInput, { solve, volume }: DynamoFile, profiles: DynamoProfiles): DynamoProblem['parities'] {
  const splits = isSymmetric(profiles, volume.radius, volume.height);
  if (solve.parity === 'mixed' || (solve.parity === 'both' && !splits)) return ['mixed'];
  if (!splits) {
    refuse(input, ['solve', 'parity'], `the profiles are not symmetric about the plane (alpha and the vertical wind odd in z, the rest even), so no mode is purely ${solve.parity}; allowed is mixed`);
  }
  return solve.parity === 'both' ? ['even', 'odd'] : [solve.parity];
}

function refuse(input: YamlInput, path: YamlPath, reason: string): never {
  throw new InputError(`${path.join('.')}: ${reason}`, placeAt(input, path));
}

/** Errors without a place get that of the value; formulas that use a wrong name say so at their own key. */
function placed<T>(input: YamlInput, path: YamlPath, compute: () => T): T {
  try {
    return compute();
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    const reason = error instanceof FormulaError ? `${path.join('.')}: ${error.reason}` : error.reason;
    throw new InputError(reason, { ...placeAt(input, path), ...error.place });
  }
}
