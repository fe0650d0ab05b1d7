import { randomStream } from '../../src/math/random.ts';
import type { SceneParts } from './scenes.ts';

/** A scene that somebody could have written, rays over its disc, and frequencies to look at. */
export interface RandomScene {
  readonly parts: SceneParts;
  readonly rays: readonly [north: readonly number[], east: readonly number[]];
  readonly hertz: readonly number[];
}

/** The random scene of a number: built-in models in realistic ranges, any inclination, the central ray among the rays. */
export function randomScene(number: number, tolerance: number, rays = 12): RandomScene {
  const stream = randomStream(1, 'random scene', number);
  const even = (from: number, to: number): string => (from + (to - from) * stream.uniform()).toPrecision(5);
  const log = (from: number, to: number): string => (from * (to / from) ** stream.uniform()).toPrecision(5);
  const pick = <T>(...items: readonly T[]): T => items[Math.floor(items.length * stream.uniform())];
  const flux = (): string => `radius: ${even(3, 9)} kpc, smoothing: ${log(0.2, 2)} kpc, openingAngle: ${even(10, 70)} deg, turnover: ${even(1, 5)} kpc, parity: ${pick('even', 'odd')}`;
  const discs = [
    () => `{model: axisymmetric-spiral, strength: ${even(2, 12)} uG, pitch: ${even(-40, 40)} deg, radius: ${even(3, 12)} kpc, innerRadius: ${log(0.3, 2)} kpc, height: ${log(0.15, 1.5)} kpc, closure: ${even(2, 6)} kpc}`,
    () => `{model: spiral-mode, mode: ${pick(1, 2, 3)}, strength: ${even(2, 8)} uG, pitch: ${pick('', '-')}${even(8, 35)} deg, radius: ${even(4, 10)} kpc, innerRadius: ${even(0.5, 2)} kpc, height: ${log(0.2, 1.5)} kpc, reference: 5 kpc, phase: ${even(0, 360)} deg}`,
  ];
  const halos = [
    () => `{model: quadrupole-halo, strength: ${even(-3, 3)} uG, core: ${log(0.6, 4)} kpc, reference: ${even(2, 6)} kpc}`,
    () => `{model: dipole-halo, strength: ${even(-2, 2)} uG, core: ${log(0.6, 4)} kpc, reference: ${even(2, 6)} kpc}`,
    () => `{model: helical-halo, strength: ${even(-3, 3)} uG, ${flux()}, turnHeight: ${pick('', '-')}${even(4, 20)} kpc}`,
    () => `{model: flared-halo, strength: ${even(-3, 3)} uG, ${flux()}, flux: ${pick('open', 'closed')}}`,
    () => `{model: toroidal-halo, strength: ${even(-5, 5)} uG, radius: ${even(3, 9)} kpc, innerRadius: ${even(0.5, 2)} kpc, peakHeight: ${even(0.5, 3)} kpc, width: ${log(0.2, 1.5)} kpc, parity: ${pick('even', 'odd')}}`,
  ];
  const disc = (name: string, amplitude: string, low: number, high: number): string =>
    `{model: ${pick('exponential-disc', 'sech2-disc', 'gaussian-disc')}, name: ${name}, ${amplitude}, radius: ${even(4, 12)} kpc, height: ${log(low, high)} kpc}`;
  const inclination = Number(pick('0', even(5, 85), even(5, 175), even(85, 95), even(30, 70)));
  const positionAngle = Number(even(0, 360));
  const parts: SceneParts = {
    tolerance,
    inclination,
    positionAngle,
    radius: Number(even(10, 18)),
    height: Number(even(4, 9)),
    index: Number(even(2.2, 3.2)),
    field: [pick(...discs)(), ...(stream.uniform() < 0.8 ? [pick(...halos)()] : [])],
    electrons: [disc('warm', `density: ${log(0.01, 0.1)} cm^-3`, 0.3, 2), ...(stream.uniform() < 0.3 ? [disc('thin', `density: ${log(0.05, 0.3)} cm^-3`, 0.08, 0.3)] : [])],
    layers: [disc('cosmic', 'normalisation: 1e-5 cm^-3', 0.2, 2.5)],
    ...(stream.uniform() < 0.6 && { turbulence: `{rms: ${log(1, 20)} uG, cell: ${log(0.01, 0.2)} kpc}` }),
  };
  const [north, east] = [[0], [0]];
  const angle = (positionAngle * Math.PI) / 180;
  const squeeze = Math.max(0.15, Math.abs(Math.cos((inclination * Math.PI) / 180)));
  while (north.length < rays) {
    const [radius, azimuth] = [12 * Math.sqrt(stream.uniform()), 2 * Math.PI * stream.uniform()];
    const [major, minor] = [radius * Math.cos(azimuth), radius * Math.sin(azimuth) * squeeze];
    north.push(major * Math.cos(angle) - minor * Math.sin(angle));
    east.push(major * Math.sin(angle) + minor * Math.cos(angle));
  }
  return { parts, rays: [north, east], hertz: pick([0.35e9, 1.4e9, 4.8e9], [0.7e9, 0.9e9, 1.4e9, 2.3e9, 4.8e9], [1.2e9, 1.4e9, 1.6e9, 3e9, 8e9]) };
}
