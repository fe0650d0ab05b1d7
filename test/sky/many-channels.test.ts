import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { localBackend } from '../../src/ray/job.ts';
import type { RayBundle } from '../../src/ray/types.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import type { Band, Scene } from '../../src/scene/types.ts';
import { pickPilot, pilotBand } from '../../src/sky/band-pilot.ts';
import { channelMaker, type ChannelBasis } from '../../src/sky/channel-basis.ts';
import { chooseWays, followBands, type BandWay } from '../../src/sky/follow-bands.ts';
import { observe, lookAt } from '../../src/sky/observe.ts';
import { planSpectrum } from '../../src/sky/spectral-plan.ts';
import { blockPixels, makeMixer } from '../../src/sky/wasm-mix.ts';
import { randomScene } from '../ray/random-scene.ts';
import { sceneOf } from '../ray/scenes.ts';

const backend = localBackend();

function bandOf(fromHz: number, toHz: number, count: number, isWide = true): Band {
  const widthHz = (toHz - fromHz) / count;
  const channels = Array.from({ length: count }, (_, k) => ({ frequencyHz: fromHz + (k + 0.5) * widthHz, widthHz: isWide ? widthHz : 0 }));
  return { name: 'all', centreHz: (fromHz + toHz) / 2, channels };
}

interface Channels {
  readonly I: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
}

function allChannels(basis: ChannelBasis, rays: number, count: number): Channels {
  const all = (stokes: keyof ChannelBasis): Float64Array => channelMaker(basis[stokes], rays, 1e-7)(0, count);
  return { I: all('I'), Q: all('Q'), U: all('U') };
}

/** Largest differences over the scale of the promise (design/physics.md section 3), over all channels. */
function worst(got: Channels, want: Channels, rays: number): { I: number; P: number } {
  const errors = { I: 0, P: 0 };
  for (let start = 0; start < want.I.length; start += rays) {
    let [scaleI, scaleP] = [0, 0];
    for (let k = start; k < start + rays; k++) {
      scaleI = Math.max(scaleI, want.I[k]);
      scaleP = Math.max(scaleP, Math.hypot(want.Q[k], want.U[k]));
    }
    scaleP = Math.max(scaleP, 1e-3 * scaleI);
    for (let k = start; k < start + rays; k++) {
      errors.I = Math.max(errors.I, Math.abs(got.I[k] - want.I[k]) / scaleI);
      errors.P = Math.max(errors.P, Math.abs(got.Q[k] - want.Q[k]) / scaleP, Math.abs(got.U[k] - want.U[k]) / scaleP);
    }
  }
  return errors;
}

/** A band by nodes and by following every frequency, the latter's averages taken ten times finer than asked for. */
async function bothWays(scene: Scene, bundle: RayBundle, band: Band, foreground: number) {
  const rays = bundle.northKpc.length;
  const interpolation = await pilotBand(scene, band, pickPilot(bundle, foreground), 400, backend);
  if (!interpolation) throw new Error('no number of nodes was found');
  const finer = { ...scene, numerics: { ...scene.numerics, tolerance: scene.numerics.tolerance / 10 } };
  const direct: BandWay = { kind: 'direct', plan: planSpectrum(finer, bundle, [band], { foreground: Math.abs(foreground) }) };
  const follow = (way: BandWay) => followBands(scene, bundle, [band], foreground, [way], backend);
  const [got, want] = [await follow({ kind: 'nodes', interpolation }), await follow(direct)];
  const channels = (basis: ChannelBasis): Channels => allChannels(basis, rays, band.channels.length);
  return { degrees: interpolation.nodes.degrees, got, want, points: direct.plan.spectrum.length, errors: worst(channels(got.bases[0]), channels(want.bases[0]), rays) };
}

const cases: readonly { readonly name: string; readonly number: number; readonly band: Band; readonly foreground?: number; readonly inclination?: number; readonly heightIndex?: number; readonly tolerance?: number }[] = [
  { name: '128 channels, face-on', number: 1, band: bandOf(1.3e9, 1.7e9, 128), inclination: 0 },
  { name: '128 channels, inclined, foreground', number: 2, band: bandOf(1.3e9, 1.7e9, 128), inclination: 50, foreground: 40 },
  { name: '1024 narrow channels, edge-on', number: 3, band: bandOf(1.3e9, 1.7e9, 1024, false), inclination: 90 },
  { name: '16 channels, clockwise', number: 4, band: bandOf(2e9, 4e9, 16), inclination: 140 },
  { name: 'a very wide band', number: 5, band: bandOf(0.3e9, 10e9, 96, false), inclination: 75 },
  { name: 'long wavelengths, depolarized', number: 6, band: bandOf(0.3e9, 0.36e9, 64, false), inclination: 30 },
  { name: 'layers that depend on frequency', number: 7, band: bandOf(1.2e9, 1.8e9, 32), inclination: 60, heightIndex: 0.5 },
  { name: 'such layers, narrow channels, a wide band', number: 8, band: bandOf(1e9, 4e9, 48, false), inclination: 80, heightIndex: 0.25 },
  { name: 'a tight tolerance', number: 9, band: bandOf(1.3e9, 1.7e9, 64, false), inclination: 85, tolerance: 1e-7 },
];

for (const { name, number, band, foreground = 0, inclination, heightIndex, tolerance = 1e-4 } of cases) {
  test(`channels from nodes are those followed directly: ${name}`, async () => {
    const { parts, rays } = randomScene(number, tolerance, 24);
    const layers = heightIndex === undefined ? parts.layers : [parts.layers[0].replace('}', `, heightIndex: ${heightIndex}, heightAt: 1.4 GHz}`)];
    const scene = sceneOf({ ...parts, layers, ...(inclination !== undefined && { inclination }) });
    const bundle = { northKpc: Float64Array.from(rays[0]), eastKpc: Float64Array.from(rays[1]) };
    const { errors, got, want } = await bothWays(scene, bundle, band, foreground);
    // Both share the errors of their rays; what differs is a fifth of the tolerance by choice, a tenth in the direct averages.
    expect(errors.I).toBeLessThan(0.3 * tolerance);
    expect(errors.P).toBeLessThan(0.3 * tolerance);
    expect(got.error).toBeLessThan(tolerance);
    // Heights of origin at the band's centre are followed themselves, in panels that other wavelengths may have chosen.
    got.origins[0].heightKpc.forEach((height, ray) => {
      const other = want.origins[0].heightKpc[ray];
      if (!Number.isNaN(other)) expect(Math.abs(height - other)).toBeLessThan(200 * tolerance * parts.height! + 1e-9);
    });
  }, 30_000);
}

function imageOf(side: number, pixelKpc: number): RayBundle {
  const offset = (k: number): number => (k - (side - 1) / 2) * pixelKpc;
  return {
    northKpc: Float64Array.from({ length: side * side }, (_, k) => offset(Math.floor(k / side))),
    eastKpc: Float64Array.from({ length: side * side }, (_, k) => -offset(k % side)),
  };
}

test('many channels go by nodes, few are followed directly; the counts are small', async () => {
  const scene = parseScene(readFileSync('test/reference/a-spiral-quadrupole.yaml', 'utf8'), 'a');
  const bundle = imageOf(129, 30 / 129);
  const few = await chooseWays(scene, bundle, [bandOf(1.3e9, 1.7e9, 3, false)], 0, backend);
  expect(few[0].kind).toBe('direct');
  const [narrow, wide] = await chooseWays(scene, bundle, [bandOf(1.3e9, 1.7e9, 128, false), bandOf(1.3e9, 1.7e9, 128)], 0, backend);
  for (const way of [narrow, wide]) {
    expect(way.kind).toBe('nodes');
    // The quadrupole's centre apart, depths of this scene turn P by about +-2 rad over half the band: Bessel functions end at 9 or so.
    if (way.kind === 'nodes') expect(way.interpolation.nodes.spectrum.length).toBeLessThanOrEqual(12);
  }
});

const seenScene = `gyrelight: 1
title: Many channels
galaxy: {distance: 10 Mpc, inclination: 50 deg, positionAngle: 25 deg, volume: {radius: 12 kpc, height: 5 kpc}}
field: [{model: axisymmetric-spiral, strength: 6 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.8 kpc, closure: 4 kpc}]
thermalElectrons: [{model: exponential-disc, density: 0.03 cm^-3, radius: 10 kpc, height: 1 kpc}]
cosmicRays: {index: 2.8, layers: [{model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.2 kpc}]}
observation:
  image: {pixels: [19, 18], pixel: 26 arcsec}
  bands: [{name: L, from: 1.3 GHz, to: 1.7 GHz, channels: 48}, {name: C, at: [4.8 GHz]}, {name: list, at: [${Array.from({ length: 60 }, (_, k) => `${1 + 0.01 * k} GHz`).join(', ')}]}]
  beam: {major: 60 arcsec, minor: 52 arcsec, angle: 30 deg}
  shortSpacings: {missingBelow: 5 arcmin}
  foreground: {depth: 12 rad/m^2, gradient: {amount: 3 rad/m^2/kpc, angle: 20 deg}}
numerics: {tolerance: 1e-4, seed: 7, bits: 64}
`;

test('through foreground, beam and high-pass a band by nodes is that of single channels', async () => {
  const scene = parseScene(seenScene, 'seen');
  const sky = await observe(scene, backend);
  const [L, , list] = sky.cubes;
  // One channel at a time is always followed directly.
  for (const [cube, channel] of [[L, 0], [L, 29], [list, 41]] as const) {
    const one = await observe({ ...scene, observation: { ...scene.observation, bands: [{ name: 'one', channels: [cube.channels[channel]], centreHz: cube.channels[channel].frequencyHz }] } }, backend);
    const pixels = sky.grid.nx * sky.grid.ny;
    const plane = (values: Float64Array): Float64Array => values.slice(channel * pixels, (channel + 1) * pixels);
    const differences = worst({ I: plane(cube.I), Q: plane(cube.Q), U: plane(cube.U) }, one.cubes[0], pixels);
    expect(differences.I).toBeLessThan(1e-4);
    expect(differences.P).toBeLessThan(1e-4);
    if (cube !== list) continue;
    // A list of frequencies has heights of origin at each, interpolated here.
    const heights = plane(sky.origins[2].heightKpc);
    const own = one.origins[0].heightKpc;
    const errors = Array.from(own, (height, k) => Math.abs(heights[k] - height)).filter((error) => !Number.isNaN(error)).sort((a, b) => a - b);
    expect(errors.length).toBeGreaterThan(60);
    // Errors of P of 1e-4 of the largest count up to 1/100 times as much where P all but vanishes beside its parts.
    expect(errors[Math.floor(0.9 * errors.length)]).toBeLessThan(0.005);
    expect(errors[errors.length - 1]).toBeLessThan(0.3);
  }
});

test('channels are the same whichever are asked for together, noise included', async () => {
  const scene = parseScene(seenScene.replace('  foreground', '  noise: 20 uJy/beam\n  foreground'), 'seen');
  const sky = await lookAt(scene, backend);
  const [band] = sky.bands;
  const pixels = sky.grid.nx * sky.grid.ny;
  const all = band.planes(0, 48);
  for (const [from, to] of [[0, 1], [5, 12], [47, 48]]) {
    const some = band.planes(from, to);
    for (const stokes of ['I', 'Q', 'U'] as const) expect(some[stokes]).toEqual(all[stokes].subarray(from * pixels, to * pixels));
  }
});

test('sums of planes are the same in WebAssembly and JavaScript, to the last bit', () => {
  const [terms, groups] = [7, 3];
  const weights = Float64Array.from({ length: 4 * groups * terms }, (_, k) => Math.sin(k));
  const [wasm, plain] = [makeMixer(true), makeMixer(false)];
  for (const mixer of [wasm, plain]) {
    mixer.prepare(weights, terms);
    mixer.planes().set(Float64Array.from({ length: terms * blockPixels }, (_, k) => Math.cos(3 * k)));
    mixer.mix(terms - 1);
  }
  expect(plain.channels()).toEqual(wasm.channels());
  // The sum itself, of channel 5 at pixel 17.
  let sum = 0;
  for (let term = 0; term < terms - 1; term++) sum += Math.cos(3 * (term * blockPixels + 17)) * weights[4 * terms + 4 * term + 1];
  expect(wasm.channels()[5 * blockPixels + 17]).toBe(sum);
});
