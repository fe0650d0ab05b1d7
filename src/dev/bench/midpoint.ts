import { exactSineCosine } from '../../ray/scene-graph.ts';
import { faradayDepthPerKpc, wavelengthSquared } from '../../ray/synchrotron.ts';
import type { RayBundle } from '../../ray/types.ts';
import type { Scene } from '../../scene/types.ts';

/** Sums over rays in units of C B^q kpc, in the frame of the major axis. */
export interface MidpointMap {
  readonly I: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
}

/**
 * The benchmark's plain reference in JavaScript: test/reference/a-spiral-quadrupole.yaml, written
 * by hand for this one scene, one frequency, equal steps, midpoint rule. `scene` gives geometry
 * only; the field's numbers stand here.
 */
export function followMidpoint(scene: Scene, bundle: RayBundle, frequencyHz: number, steps: number): MidpointMap {
  const [sinI, cosI] = exactSineCosine(scene.galaxy.inclination);
  const [sinPA, cosPA] = exactSineCosine(scene.galaxy.positionAngle);
  const [radius, height] = [15, 6];
  const pitch = (-20 * Math.PI) / 180;
  const [strength, fall, inner, scaleHeight, closure] = [8, 8, 1, 0.6, 4];
  const [poloidal, toroidal] = [strength * Math.sin(pitch), strength * Math.cos(pitch)];
  const [core, reference] = [2, 5];
  const halo = (2 * (reference * reference + core * core) ** 2.5) / reference;
  const turn = 2 * wavelengthSquared(frequencyHz);
  const depth = faradayDepthPerKpc * 0.03;
  const rays = bundle.northKpc.length;
  const map = { I: new Float64Array(rays), Q: new Float64Array(rays), U: new Float64Array(rays) };
  for (let ray = 0; ray < rays; ray++) {
    const x = bundle.northKpc[ray] * cosPA + bundle.eastKpc[ray] * sinPA;
    const minor = bundle.eastKpc[ray] * cosPA - bundle.northKpc[ray] * sinPA;
    const square = radius * radius - x * x;
    if (square <= 0) continue;
    const reach = Math.sqrt(square) / sinI;
    const near = Math.min((minor * cosI) / sinI + reach, (-minor * sinI + height) / cosI);
    const far = Math.max((minor * cosI) / sinI - reach, (-minor * sinI - height) / cosI);
    if (near <= far) continue;
    const ds = (near - far) / steps;
    let [phi, sumI, sumQ, sumU] = [0, 0, 0, 0];
    for (let k = 0; k < steps; k++) {
      const s = near - (k + 0.5) * ds;
      const [y, z] = [minor * cosI - s * sinI, minor * sinI + s * cosI];
      const r2 = x * x + y * y + 1e-24;
      const r = Math.sqrt(r2);
      const hole = Math.exp(-r2 / (inner * inner));
      const decay = Math.exp(-r / fall);
      const g = (1 - hole) * decay;
      const slope = ((2 * r) / (inner * inner)) * hole * decay - g / fall;
      const tanh = Math.tanh(z / scaleHeight);
      const sech2 = 1 - tanh * tanh;
      const close = Math.exp((-z * z) / (closure * closure));
      const bend = scaleHeight * tanh * close;
      const bendSlope = sech2 * close - ((2 * z) / (closure * closure)) * bend;
      const d = 1 / (r2 + z * z + core * core);
      const d5 = d * d * Math.sqrt(d);
      const d7 = d5 * d;
      const br = poloidal * g * bendSlope + halo * r * (d5 - 5 * z * z * d7);
      const bphi = toroidal * g * sech2;
      const bz = -poloidal * bend * (g / r + slope) - halo * z * (2 * d5 - 5 * r2 * d7);
      const [bx, by] = [(br * x - bphi * y) / r, (br * y + bphi * x) / r];
      const along = bz * cosI - by * sinI;
      const across = by * cosI + bz * sinI;
      const tanhGas = Math.tanh(z);
      const rate = depth * Math.exp(-r / 10) * (1 - tanhGas * tanhGas) * along * ds;
      const b2 = bx * bx + across * across + 1e-30;
      const emission = 1e-5 * Math.exp(-r / 6 - Math.abs(z) / 1.5) * b2 ** -0.05 * ds;
      const angle = turn * (phi + 0.5 * rate);
      phi += rate;
      const [cosine, sine] = [Math.cos(angle), Math.sin(angle)];
      const [major, diagonal] = [emission * (across * across - bx * bx), -2 * emission * bx * across];
      sumI += emission * b2;
      sumQ += cosine * major - sine * diagonal;
      sumU += sine * major + cosine * diagonal;
    }
    map.I[ray] = sumI;
    map.Q[ray] = sumQ;
    map.U[ray] = sumU;
  }
  return map;
}
