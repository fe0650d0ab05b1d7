import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import { axisOffsetsKpc, discCoordinates, frameFromGrid, type DiscOrientation } from '../../src/measure/disc.ts';
import { pitchAngles, regionPitches } from '../../src/measure/pitch-angle.ts';
import { smallGrid } from '../sky/cubes.ts';

const radian = Math.PI / 180;
const frame = frameFromGrid(smallGrid(61, 61));

/** Orientation on the sky of a planar spiral of pitch p, by the frame of physics.md section 2. */
function skyOrientation(pitch: number, orientation: DiscOrientation): Float64Array {
  const { azimuth } = discCoordinates(frame, orientation);
  return azimuth.map((phi) => {
    const [radial, azimuthal] = [Math.sin(pitch), Math.cos(pitch)];
    const bx = radial * Math.cos(phi) - azimuthal * Math.sin(phi);
    const by = radial * Math.sin(phi) + azimuthal * Math.cos(phi);
    // x-hat = cos PA N + sin PA E; y-hat = cos i c-hat on the sky, c-hat = -sin PA N + cos PA E.
    const across = by * Math.cos(orientation.inclination);
    const pa = orientation.positionAngle;
    const north = bx * Math.cos(pa) - across * Math.sin(pa);
    const east = bx * Math.sin(pa) + across * Math.cos(pa);
    return (Math.atan2(east, north) + Math.PI) % Math.PI;
  });
}

test('the pitch of a planar spiral comes back at every pixel, for both senses of rotation', () => {
  for (const inclination of [0, 40, 65, 130]) {
    const orientation: DiscOrientation = { inclination: inclination * radian, positionAngle: 25 * radian, distanceKpc: 10_000 };
    for (const pitch of [-20, 0, 35]) {
      const found = pitchAngles(skyOrientation(pitch * radian, orientation), frame, orientation);
      // Rounding, but for the centre, which has no azimuth.
      const wrong = found.filter((value, k) => k !== 30 * 61 + 30 && !(Math.abs(value - pitch * radian) < 1e-9));
      expect(wrong.length).toBe(0);
    }
  }
});

test('regions give the mean of noisy pitches with the right errors', () => {
  const orientation: DiscOrientation = { inclination: 0, positionAngle: 0, distanceKpc: 10_000 };
  const clean = skyOrientation(-0.3, orientation);
  const { alongMajor } = axisOffsetsKpc(frame, orientation);
  const regions = Int32Array.from(alongMajor, (x) => (x > 2 ? 0 : x < -2 ? 1 : -1));
  const sigma = 0.2;
  const pulls: number[] = [];
  for (let draw = 0; draw < 60; draw++) {
    const { gaussian } = randomStream(draw, 'pitch');
    const angles = clean.map((angle) => angle + sigma * gaussian());
    const found = regionPitches(pitchAngles(angles, frame, orientation), angles.map(() => sigma), regions, 2, frame, orientation);
    for (const { pitch, error, scatterError } of found) {
      pulls.push((pitch + 0.3) / error);
      // Both errors say the same where the scatter is the noise; 700 pixels know it to 3 %, and e^{-2 sigma^2} shortens by 8 %.
      expect(Math.abs(scatterError / error - 1)).toBeLessThan(0.15);
    }
  }
  const rms = Math.sqrt(pulls.reduce((sum, pull) => sum + pull * pull, 0) / pulls.length);
  // 120 draws: 4 sigma is 4/sqrt(240).
  expect(Math.abs(rms - 1)).toBeLessThan(0.26);
  expect(regionPitches(clean.map(() => NaN), undefined, regions, 2, frame, orientation)[0].pitch).toBeNaN();
});
