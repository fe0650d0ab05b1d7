import { describe, expect, it } from 'vitest';
import { orientationOf } from '../../src/scene/orient.ts';
import { gyrelight } from './run.ts';

const degree = Math.PI / 180;

describe('gyrelight orient', () => {
  // design/physics.md section 2: i < 90 deg turns counter-clockwise on the sky and has its near side at PA - 90 deg.
  it.each([
    ['counter-clockwise', 40, -65],
    ['clockwise', 140, 115],
  ] as const)('a disc that turns %s', (turns, inclination, near) => {
    const found = orientationOf({ receding: 25 * degree, tilt: 40 * degree, turns });
    expect(Math.abs(found.inclination - inclination * degree)).toBeLessThan(1e-12);
    expect(Math.abs(found.nearSide - ((near + 360) % 360) * degree)).toBeLessThan(1e-12);
    expect(orientationOf({ receding: 25 * degree, tilt: 40 * degree, near: (near + 20) * degree }).turns).toBe(turns);
    // Arms trail (common practice): they run outwards against the turning.
    const arms = turns === 'clockwise' ? 'counter-clockwise' : 'clockwise';
    expect(orientationOf({ receding: 25 * degree, tilt: 40 * degree, arms }).turns).toBe(turns);
  });

  it('refuses clues that disagree', () => {
    expect(() => orientationOf({ receding: 0, tilt: 0.5, turns: 'clockwise', arms: 'clockwise' })).toThrow(/cannot both hold/);
  });

  it('prints lines for a scene', () => {
    const { stdout, status } = gyrelight(['orient', '--receding', '300 deg', '--inclination', '55 deg', '--turns', 'clockwise']);
    expect(status).toBe(0);
    expect(stdout).toContain('galaxy: {inclination: 125 deg, positionAngle: 300 deg}');
  });
});
