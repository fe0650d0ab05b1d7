import type { Scene } from '../scene/types.ts';
import { output, type SpectralPoint } from './integrand.ts';
import { probeScene } from './probe.ts';
import { rayPoints } from './ray-points.ts';
import { brightnessPerKpc, intrinsicPolarization, wavelengthSquared } from './synchrotron.ts';
import { makeRayEngine } from './trace.ts';

/** One line of sight, sampled from the far end to the observer's; every array has one value a piece. */
export interface Sightline {
  /** Along the ray towards the observer from the plane of the sky through the centre, kpc. */
  readonly sKpc: Float64Array;
  /** Height above the plane of the disc, kpc. */
  readonly zKpc: Float64Array;
  /** Field along the line of sight, positive towards the observer, uG. */
  readonly alongUG: Float64Array;
  /** Thermal electrons, cm^-3. */
  readonly electrons: Float64Array;
  /** Faraday depth between a piece and the observer, rad m^-2, without foreground. */
  readonly depth: Float64Array;
  /** One per frequency, in the order asked for. */
  readonly light: readonly SightlineLight[];
}

/** What one frequency sees of a line of sight. */
export interface SightlineLight {
  readonly frequencyHz: number;
  /** j_I, Jy/sr per kpc. */
  readonly emission: Float64Array;
  /** Polarized emission at its origin, Q and U of each piece (IAU), Jy/sr. */
  readonly Q: Float64Array;
  readonly U: Float64Array;
  /** Net part of each piece in |P| as observed, Jy/sr: negative where it cancels (physics.md section 5). */
  readonly share: Float64Array;
  /** |P| over all pieces, and without rotation and damping and all in phase, Jy/sr. */
  readonly P: number;
  readonly emittedP: number;
}

/**
 * Follows one ray in `pieces` equal steps and says what is where, and which layer each frequency
 * sees. Offsets from the centre in kpc. Undefined where the ray misses the galaxy's volume. For
 * pictures: the sums agree with the ray transfer to second order in the step.
 */
export function followSightline(scene: Scene, northKpc: number, eastKpc: number, spectrum: readonly SpectralPoint[], pieces = 600): Sightline | undefined {
  const engine = makeRayEngine(scene, spectrum, 'javascript');
  const inputs = engine.integrand.inputs(scene);
  const points = rayPoints(scene, northKpc, eastKpc, pieces);
  if (!points) return undefined;
  const { sKpc, x, y, z, stepKpc } = points;
  const probe = probeScene(scene, { x, y, z });
  const [si, ci] = [Math.sin(scene.galaxy.inclination), Math.cos(scene.galaxy.inclination)];
  const out = engine.integrand.program.outputs.map(() => new Float64Array(pieces));
  engine.kernel().evaluate(pieces, inputs.parameters, [x, y, z], out, inputs.tables, inputs.grids);
  const depth = towardsObserver(out[output.faraday], stepKpc);
  const variance = towardsObserver(out[output.dispersion], stepKpc);
  const measure = towardsObserver(out[output.emissionMeasure], stepKpc);
  const turned = 2 * scene.galaxy.positionAngle;
  const { index } = scene.cosmicRays;
  const light = spectrum.map(({ frequencyHz }, k): SightlineLight => {
    const unit = brightnessPerKpc(index, frequencyHz);
    const density = out[output.firstGroup + engine.integrand.groupOf[k]];
    const emission = density.map((value, i) => unit * value * out[output.total][i]);
    const polarized = unit * intrinsicPolarization(index) * stepKpc;
    const [q, u] = [out[output.cosine], out[output.sine]];
    const Q = density.map((value, i) => polarized * value * (q[i] * Math.cos(turned) - u[i] * Math.sin(turned)));
    const U = density.map((value, i) => polarized * value * (q[i] * Math.sin(turned) + u[i] * Math.cos(turned)));
    const square = wavelengthSquared(frequencyHz);
    const opacity = inputs.freeFree?.opacity[k] ?? 0;
    const dimming = variance.map((value, i) => Math.exp(-2 * square * square * value - opacity * measure[i]));
    return { frequencyHz, emission, Q, U, ...netShares(Q, U, depth, dimming, square) };
  });
  return {
    sKpc,
    zKpc: z,
    alongUG: probe.Bz.map((value, i) => value * ci - probe.By[i] * si),
    electrons: probe.ne,
    depth,
    light,
  };
}

/** ∫ of a rate from the middle of each piece to the observer's end. */
function towardsObserver(rate: Float64Array, step: number): Float64Array {
  const sum = new Float64Array(rate.length);
  let behind = 0;
  for (let i = rate.length - 1; i >= 0; i--) {
    sum[i] = behind + (step * rate[i]) / 2;
    behind += step * rate[i];
  }
  return sum;
}

function netShares(Q: Float64Array, U: Float64Array, depth: Float64Array, dimming: Float64Array, square: number): Pick<SightlineLight, 'share' | 'P' | 'emittedP'> {
  const turnedQ = new Float64Array(Q.length);
  const turnedU = new Float64Array(Q.length);
  let [sumQ, sumU, emittedP] = [0, 0, 0];
  for (let i = 0; i < Q.length; i++) {
    const [c, s] = [dimming[i] * Math.cos(2 * square * depth[i]), dimming[i] * Math.sin(2 * square * depth[i])];
    turnedQ[i] = c * Q[i] - s * U[i];
    turnedU[i] = s * Q[i] + c * U[i];
    sumQ += turnedQ[i];
    sumU += turnedU[i];
    emittedP += Math.hypot(Q[i], U[i]);
  }
  const P = Math.hypot(sumQ, sumU);
  const [x, y] = P > 0 ? [sumQ / P, sumU / P] : [1, 0];
  return { share: turnedQ.map((value, i) => value * x + turnedU[i] * y), P, emittedP };
}
