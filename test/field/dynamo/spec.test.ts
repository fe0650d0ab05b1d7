import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { angularSpeedOf } from '../../../src/field/dynamo/rotation-curve.ts';
import { readDynamoSpec, type DynamoSpec } from '../../../src/field/dynamo/spec.ts';
import { readRotationCsv } from '../../../src/files/rotation-csv.ts';
import { readYaml } from '../../../src/units/yaml-input.ts';

const curve = { radiiKpc: [1, 2, 4, 8, 12], speedsKms: [100, 160, 200, 200, 200] };
const least = 'gyrelight-dynamo: 1\nvolume: {radius: 10 kpc, height: 4 kpc}\n';
const text = (more: string, rotation = 'rotation: {file: curve.csv}\n'): string => `${least}${rotation}${more}`;
const read = (whole: string): DynamoSpec => readDynamoSpec(readYaml(whole, 'a.dynamo.yaml'), () => curve);
const close = (a: number, b: number, tolerance = 1e-12): void => expect(Math.abs(a / b - 1)).toBeLessThan(tolerance);

describe('the dynamo’s file', () => {
  it('needs a volume and a rotation, and fills in a turbulent disc', () => {
    const { problem, tolerance } = read(text(''));
    const { profiles, parities, grid } = problem;
    close(profiles.angularSpeed(8, 1), 25, 1e-2);
    // eta = l u/3 (checks.json 8.worked: 100 pc, 10 km/s: 1.0286e26 cm^2/s, 1/3 kpc km/s).
    close(profiles.diffusivity(5, 0), 1 / 3);
    // alpha_0 = l^2 Omega/h at z = h, held below u.
    const omega = profiles.angularSpeed(8, 0);
    close(profiles.alpha(8, 0.5), (0.01 * omega) / (0.5 + 0.001 * omega));
    expect(profiles.alpha(8, -0.5)).toBe(-profiles.alpha(8, 0.5));
    expect(profiles.windVertical(3, 2)).toBe(0);
    expect(parities).toEqual(['even', 'odd']);
    expect([grid.radialCells, grid.verticalCells, tolerance]).toEqual([30, 40, 0.03]);
  });

  it('takes quantities of any unit and formulas of r, z, Omega, shear and parameters', () => {
    const { profiles } = read(text('parameters: {q: 500 m/s, top: 2000 pc, d: 3.0856775814913673e26 cm^2/s}\ndefine: {x: z/top}\nalpha: q*x + 0*Omega*shear\ndiffusivity: d*(1 + r)\nequipartition: 6000 nG\n')).problem;
    close(profiles.alpha(3, 1), 0.25);
    close(profiles.diffusivity(1, 0), 2);
    close(profiles.equipartition(1, 0), 6);
  });

  it('reads rotation from lists and formulas too', () => {
    close(read(text('', 'rotation: {speed: 220*tanh(r/2)}\n')).problem.profiles.angularSpeed(2, 0), 110 * Math.tanh(1));
    close(read(text('', 'rotation: {speed: 220*tanh(r/2)}\n')).problem.profiles.angularSpeed(0, 0), 110, 1e-6);
    close(read(text('', 'rotation: {angularSpeed: 30 - z^2}\n')).problem.profiles.angularSpeed(2, 1), 29);
    close(read(text('', 'rotation: {radius: [1 kpc, 2 kpc, 5 kpc, 12 kpc], speed: [80 km/s, 150 km/s, 200 km/s, 0.2 m/s]}\n')).problem.profiles.angularSpeed(5, 0), 40);
  });

  it('blows straight up or along a cone', () => {
    const up = read(text('wind: {speed: 100 km/s, height: 2 kpc}\n')).problem.profiles;
    expect([up.windVertical(3, 2), up.windVertical(3, -2), up.windRadial(3, 2)]).toEqual([50, -50, 0]);
    const cone = read(text('wind: {speed: 100 km/s, height: 2 kpc, apex: 2 kpc}\n')).problem.profiles;
    close(Math.hypot(cone.windVertical(3, 2), cone.windRadial(3, 2)), 50);
    close(cone.windRadial(3, -2) / -cone.windVertical(3, -2), 3 / 4);
  });

  it('solves the whole plane where the profiles are not symmetric about it', () => {
    expect(read(text('alpha: 1 km/s\n')).problem.parities).toEqual(['mixed']);
    expect(read(text('solve: {parity: mixed}\n')).problem.parities).toEqual(['mixed']);
    expect(read(text('solve: {parity: odd}\n')).problem.parities).toEqual(['odd']);
  });

  it('says where a rotation curve ends', () => {
    expect(readDynamoSpec(readYaml(text(''), 'f'), () => ({ radiiKpc: [1, 2, 3, 4], speedsKms: [1, 2, 3, 4] })).notes).toEqual(['The rotation curve ends at 4 kpc; its last speed is kept beyond.']);
  });

  it.each([
    ['volume: {radius: 10, height: 4 kpc}', /a\.dynamo\.yaml:2:18: volume\.radius: 10 has no unit/],
    [text('wnd: {speed: 5 km/s}'), /a\.dynamo\.yaml:4:1: unknown key "wnd" \(did you mean "wind"\?\)/],
    [text('alpha: 3*zz'), /a\.dynamo\.yaml:4:8: alpha: formula "3\*zz", character 3: unknown name "zz"/],
    [text('alpha: 3'), /a\.dynamo\.yaml:4:8: 3 has no unit/],
    [text('alpha: 3 kpc'), /a\.dynamo\.yaml:4:8: "3 kpc" is a length: a speed is wanted/],
    [text('diffusivity: 1 - r'), /:4:14: diffusivity: diffusivity is 0 kpc km\/s at r = 1 kpc.*allowed is more than 0/],
    [text('alpha: z/r'), /:4:8: alpha: alpha is (-Infinity|NaN) at r = 0 kpc/],
    [text('grid: {radial: 41, vertical: 40}'), /:4:16: grid\.radial: 41 cells cannot be halved/],
    [text('grid: {radial: 4, vertical: 40}'), /grid\.radial: 4 is outside|grid\.radial: 4 is not allowed: a whole number, 16 to 1000/],
    [text('wind: {speed: 5 km/s, vertical: z}'), /either "speed".*or formulas/],
    [text('wind: {height: 5 kpc}'), /"height" and "apex" need "speed"/],
    [text('parameters: {h: 1 kpc}'), /:4:17: parameters\.h: the name "h" already means something else/],
    [text('parameters: {b: 1 Jy}'), /lengths, times, fields and angles/],
    [text('solve: {parity: even}\nalpha: 1 km/s'), /solve\.parity: the profiles are not symmetric.*allowed is mixed/],
    [text('solve: {strength: 3 uG}'), /"strength" belongs to "state: mode"/],
    [text('', 'rotation: {}\n'), /rotation: one of "file", lists/],
    [text('', 'rotation: {radius: [1 kpc, 2 kpc, 3 kpc, 4 kpc]}\n'), /rotation: one of "file", lists/],
    [text('', 'rotation: {radius: [1 kpc, 2 kpc, 2 kpc, 4 kpc], speed: [1 km/s, 2 km/s, 3 km/s, 4 km/s]}\n'), /radii must ascend, but point 3/],
    ['gyrelight: 1\n', /"gyrelight-dynamo: 1" is missing; this file says "gyrelight"/],
  ])('refuses %j with its place', (given, message) => {
    expect(() => read(given.startsWith('volume') ? `gyrelight-dynamo: 1\n${given}\nrotation: {file: c}\n` : given)).toThrow(message);
  });
});

describe('rotation curves', () => {
  it('come from CSV, in other units by an ECSV header', () => {
    const file = 'scenes/lantern-wheel/rotation.csv';
    const { radiiKpc, speedsKms } = readRotationCsv(readFileSync(file, 'utf8'), file);
    expect([radiiKpc[0], speedsKms[0], radiiKpc.length]).toEqual([0.5, 62, 13]);
    const header = '# %ECSV 1.0\n# ---\n# delimiter: \',\'\n# datatype:\n# - {name: radius, unit: pc, datatype: float64}\n# - {name: speed, unit: m/s, datatype: float64}\n';
    expect(readRotationCsv(`${header}radius,speed\n1500,2000\n`, 'a.csv')).toEqual({ radiiKpc: [1.5], speedsKms: [2] });
    expect(() => readRotationCsv('radius,velocity\n1,2\n', 'a.csv')).toThrow(/a\.csv: no column "speed"/);
    expect(() => readRotationCsv('radius,speed\n1,fast\n', 'a.csv')).toThrow(/a\.csv:2:3: column "speed": "fast" is no number/);
  });

  it('pass through their points and rest on the axis', () => {
    const omega = angularSpeedOf(curve);
    curve.radiiKpc.forEach((r, k) => close(omega(r, 0) * r, curve.speedsKms[k]));
    expect(Number.isFinite(omega(0, 0))).toBe(true);
    close(omega(1e-3, 0), omega(0, 0), 1e-3);
    close(omega(40, 0), 5);
    expect(() => angularSpeedOf({ radiiKpc: [0, 1, 2, 3], speedsKms: [5, 6, 7, 8] })).toThrow(/5 km\/s on the axis/);
    expect(() => angularSpeedOf({ radiiKpc: [1, 2], speedsKms: [5, 6] })).toThrow(/at least 4/);
  });
});
