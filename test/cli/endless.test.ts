import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { gyrelight, namesIn } from './run.ts';

const scene = `gyrelight: 1
title: Waves without end
galaxy: {distance: 10 Mpc, inclination: 40 deg, positionAngle: 0 deg, volume: {radius: 12 kpc, height: 5 kpc}}
field:
  - {model: formula, name: waves, parameters: {b: 3 uG}, field: {phi: "b*sin(1e6*z)"}}
thermalElectrons: [{model: sech2-disc, density: 0.03 cm^-3, radius: 10 kpc, height: 1 kpc}]
cosmicRays: {index: 2.8, layers: [{model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.5 kpc}]}
observation: {image: {pixels: 64, pixel: 8 arcsec}, bands: [{name: L, at: [1.4 GHz]}]}
`;

it('a scene that no number of samples resolves ends soon as wrong input, from a worker too', () => {
  const folder = mkdtempSync(join(tmpdir(), 'gyrelight-endless-'));
  try {
    writeFileSync(join(folder, 's.yaml'), scene);
    const { status, stderr } = gyrelight(['map', 's.yaml', '--out', 'o', '--workers', '2'], folder);
    expect(stderr).toMatch(/the ray at north .* kpc, east .* kpc is not resolved to a tolerance of/);
    expect(stderr).not.toMatch(/\n\s+at /);
    expect(status).toBe(2);
    expect(namesIn(folder)).toEqual(['s.yaml']);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
});
