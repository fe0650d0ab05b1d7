import { describe, expect, it } from 'vitest';
import { parseCsv, csvNumbers } from '../../src/files/csv-parse.ts';
import { makeJointModel } from '../../src/infer/joint-model.ts';
import { chiSquared, logLikelihood } from '../../src/infer/likelihood.ts';
import { jointLikelihood } from '../../src/infer/other-data.ts';
import type { OtherData } from '../../src/infer/other-data.ts';
import { readOther } from '../../src/infer/read-other.ts';
import type { ReadMap } from '../../src/infer/map-facts.ts';
import { sceneWith } from '../../src/infer/scene-of.ts';
import type { OtherEntry } from '../../src/infer/study-types.ts';
import type { DataSet } from '../../src/infer/types.ts';
import { localBackend } from '../../src/ray/job.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { testAxes, testData } from './grids.ts';

// A uniform field along the line of sight seen face-on: the depth is known in closed form.
const scene = parseScene(`gyrelight: 1
title: Uniform slab
galaxy: {distance: 10 Mpc, inclination: 0 deg, positionAngle: 0 deg, volume: {radius: 10 kpc, height: 2 kpc}, centre: {ra: 150 deg, dec: 20 deg}}
field: [{model: uniform, name: all, x: 1 uG, y: 0 uG, z: 2 uG}]
thermalElectrons: [{model: slab, name: gas, density: 0.01 cm^-3, halfThickness: 1 kpc}]
cosmicRays: {index: 3, layers: [{model: slab, name: electrons, normalisation: 1e-5 cm^-3, halfThickness: 1 kpc}]}
observation: {image: {pixels: 9, pixel: 30 arcsec}, bands: [{name: L, at: [1.4 GHz]}], foreground: {depth: 7 rad/m^2}}
`, 'slab.scene.yaml');
const axes = testAxes(9, 9, 30);
const pixels = axes.nx * axes.ny;
const beam = { majorArcsec: 70, minorArcsec: 70, angle: 0 };
/** K n B L = 0.811901164165 * 0.01 * 2 * 2000 (physics.md section 1). */
const depth = 0.811901164165 * 0.01 * 2 * 2000;

const channels = [1.4e9, 1.7e9].map((frequencyHz) => ({ frequencyHz, widthHz: 0 }));
const base = { label: 'x', weight: 1, sigma: new Float64Array(0), values: new Float64Array(0) };
const others: OtherData[] = [
  { ...base, quantity: 'RM', kind: 'sources', channels: [], places: [{ raDeg: 150, decDeg: 20 }, { raDeg: 150, decDeg: 20.02 }, { raDeg: 150, decDeg: 21 }] },
  { ...base, quantity: 'P', kind: 'map', channels, beam },
  { ...base, quantity: 'chi', kind: 'map', channels: [channels[0]], beam },
  { ...base, quantity: 'RM', kind: 'map', channels, beam, values: new Float64Array(pixels) },
  { ...base, quantity: 'P', kind: 'spectrum', channels },
  { ...base, quantity: 'P', kind: 'sectors', channels: [channels[0]], beam, ring: { innerKpc: 2, outerKpc: 5, sectors: 6 } },
  { ...base, quantity: 'RM', kind: 'sectors', channels, beam, ring: { innerKpc: 2, outerKpc: 5, sectors: 6 } },
];
const maps = testData(axes, [{ quantity: 'Q', noise: 1e-5 }, { quantity: 'U', noise: 1e-5 }]);
const data: DataSet = { ...maps, bands: maps.bands.map((band) => ({ ...band, beam })), others };

describe('makeJointModel', () => {
  const sceneOf = (values: ArrayLike<number>) => sceneWith(scene, ['observation.foreground.depth'], values);
  const model = makeJointModel(data, scene, sceneOf, localBackend());

  it('gives what the maps of Q and U hold, and the whole depth behind the galaxy', async () => {
    const [Q, U, sources, P, chi, rm, spectrum, sectorsP, sectorsRm] = await model(Float64Array.of(7));
    const middle = 4 * 9 + 4;
    // Total depth and the foreground's; nothing but the foreground beyond the disc. Rays are good to 1e-4.
    [depth + 7, depth + 7, 7].forEach((value, k) => expect(Math.abs(sources[k] / value - 1)).toBeLessThan(1e-3));
    expect(P[middle]).toBe(Math.hypot(Q[middle], U[middle]));
    expect(chi[middle]).toBe(Math.atan2(U[middle], Q[middle]) / 2);
    expect(P.length).toBe(2 * pixels);
    // Burn 1966: the slab's angle turns by half the depth, as long as sin(depth lambda^2) keeps its sign.
    expect(Math.abs(rm[middle] / (depth / 2 + 7) - 1)).toBeLessThan(2e-3);
    for (const value of sectorsRm) expect(Math.abs(value / (depth / 2 + 7) - 1)).toBeLessThan(2e-2);
    // The disc of 10 kpc covers the ring and its beams: P is the same in every sector and in the middle.
    for (const value of sectorsP) expect(Math.abs(value / P[middle] - 1)).toBeLessThan(2e-2);
    // Image of 9 x 30 arcsec is filled: sum over pixels = P per sr * area; beam = pi/(4 ln 2) 70^2 arcsec^2.
    const perBeam = (Math.PI / (4 * Math.LN2)) * 70 * 70;
    expect(Math.abs(spectrum[0] / ((P[middle] / perBeam) * (9 * 30) ** 2) - 1)).toBeLessThan(2e-2);
  });
});

describe('jointLikelihood', () => {
  const place = { file: 'a' };
  it('adds each part, by its weight, and leaves out what is blank', () => {
    const small = testAxes(2, 1);
    const rm: OtherData = { ...base, quantity: 'RM', kind: 'map', channels, values: Float64Array.of(10, NaN), sigma: Float64Array.of(2, 2), weight: 0.5 };
    const joint = jointLikelihood({ ...testData(small, []), others: [rm] });
    const residuals = joint.residuals([Float64Array.of(6, 0)]);
    // ((10 - 6)/2)^2 * 0.5, closed form.
    expect(Math.abs(chiSquared(residuals) - 2)).toBeLessThan(1e-12);
    expect(joint.count).toBe(0.5);
    const expected = 0.5 * (-2 - Math.log(2 * Math.sqrt(2 * Math.PI)));
    expect(Math.abs(logLikelihood(joint, residuals) - expected)).toBeLessThan(1e-12);
    expect(() => joint.residuals([Float64Array.of(NaN, 0)])).toThrow(/NaN at value 1/);
  });

  it('background sources break the tie between density and field that Q and U at short wavelength leave', async () => {
    // Depth from sources measures n B; here sigma 5 on 65 rad/m^2.
    const places = [{ raDeg: 150, decDeg: 20 }];
    const only: DataSet = { ...testData(axes, []), bands: [], others: [{ ...base, quantity: 'RM', kind: 'sources', channels: [], places, values: Float64Array.of(depth + 7), sigma: Float64Array.of(5) }] };
    const likelihood = jointLikelihood(only);
    const model = makeJointModel(only, scene, (values) => sceneWith(scene, ['thermalElectrons.gas.density'], values), localBackend());
    const lnL = async (density: number): Promise<number> => logLikelihood(likelihood, likelihood.residuals(await model(Float64Array.of(density))));
    // Half the density is half the depth: (depth/2/5)^2/2 lower.
    expect(Math.abs((await lnL(0.01)) - (await lnL(0.005)) - (depth / 10) ** 2 / 2)).toBeLessThan(0.05);
  });

  it('reads tables and maps in their units, and refuses what is missing', () => {
    const table = (text: string) => {
      const csv = parseCsv(text, 't.csv');
      return { file: 't.csv', rows: csv.rows.length, units: csv.units, column: (name: string) => csvNumbers(csv, name) };
    };
    const entry = (rest: Partial<OtherEntry>): OtherEntry => ({ quantity: 'RM', kind: 'sources', file: 't.csv', place, ...rest });
    const said: string[] = [];
    const sources = readOther({ entry: entry({ scatter: { text: '4 rad/m^2', place } }), table: table('ra,dec,rm,error\n150,20,12,3\n') }, data, said);
    expect(sources.sigma[0]).toBe(5);
    expect(() => readOther({ entry: entry({}), table: table('ra,dec,rm\n150,20,12\n') }, data, said)).toThrow(/no column "error"/);
    expect(() => readOther({ entry: entry({}), table: table('ra,dec,rm,error\n150,20,12,0\n') }, data, said)).toThrow(/row 1 is 0; allowed: above 0/);
    const profile = readOther({ entry: entry({ quantity: 'chi', kind: 'sectors', ringKpc: [4, 7], frequencyHz: 1.4e9 }), table: table('azimuth,value,error\n0,90,3\n180,0,3\n') }, data, said);
    expect(Math.abs(profile.values[0] - Math.PI / 2)).toBeLessThan(1e-15);
    expect(() => readOther({ entry: entry({ quantity: 'P', kind: 'sectors', ringKpc: [4, 7], frequencyHz: 1.4e9 }), table: table('azimuth,value,error\n10,1,3\n180,0,3\n') }, data, said)).toThrow(/row 1 is at azimuth 10 deg/);
    const map: ReadMap = { file: 'chi.fits', wcs: axes.wcs, nx: 9, ny: 9, stokes: [], quantity: 'chi', values: new Float64Array(pixels).fill(90), unit: 'deg', beam, channels: [channels[0]] };
    const chi = readOther({ entry: entry({ quantity: 'chi', kind: 'map', noise: { text: '2 deg', place } }), map }, data, said);
    expect(Math.abs(chi.sigma[0] - Math.PI / 90)).toBeLessThan(1e-15);
    // One beam of 70 arcsec is 6.2 pixels of 30 arcsec.
    expect(Math.abs(chi.weight * ((Math.PI / (4 * Math.LN2)) * 4900) / 900 - 1)).toBeLessThan(1e-9);
    expect(() => readOther({ entry: entry({ quantity: 'chi', kind: 'map' }), map }, data, said)).toThrow(/needs its noise, such as `noise: 3 deg`/);
    expect(() => readOther({ entry: entry({ quantity: 'RM', kind: 'map', noise: { text: '2 rad/m^2', place } }), map: { ...map, quantity: 'RM', unit: 'rad/m2' } }, data, said)).toThrow(/`from: \[1.4 GHz, 2.3 GHz\]`/);
  });
});
