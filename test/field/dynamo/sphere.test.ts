import { describe, expect, it } from 'vitest';
import { criticalAlpha, sphereModes } from './sphere.ts';

describe('a sphere in surroundings that stand for vacuum', () => {
  it('is a dynamo from C_alpha = 4.493 on (8.sph; Steenbeck & Krause 1966)', () => {
    // The first zero of j_1; within 1 % is asked for. The sphere's edge is a staircase of cells.
    expect(Math.abs(criticalAlpha(32) / 4.49340946 - 1)).toBeLessThan(0.01);
  });

  it.each([
    // Zeros k of j_0 and j_1 (Moffatt 1978, section 2.7): the poloidal dipole outside of which the field is
    // curl-free, and the slowest toroidal field, which vanishes at the surface.
    ['poloidal dipole', { potential: 'mirror', azimuthal: 'zero' }, Math.PI],
    ['poloidal quadrupole', { potential: 'zero', azimuthal: 'zero' }, 4.49340946],
  ] as const)('loses its %s at the rate pi^2 eta/R^2 and the like', (_, ends, k) => {
    const [mode] = sphereModes(0, 24, ends);
    expect(mode.frequency).toBe(0);
    expect(Math.abs(mode.growthRate / -(k * k) - 1)).toBeLessThan(0.02);
  });
});
