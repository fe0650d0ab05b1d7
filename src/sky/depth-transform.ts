import type { DepthPlan } from './depth-spectrum.ts';

/** Faraday spectra of pixels side by side: planes [depth * pixels + pixel]. */
export interface DepthSpectra {
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/**
 * Makes the transform F(phi) = sum w P e^{-2 i phi (lambda^2 - lambda0^2)} of a plan: a function from
 * Q and U of `pixels` pixels, planes [channel * pixels + pixel], to spectra. Where a pixel lacks
 * channels (NaN) the others carry its weight; NaN where it lacks more than half of it.
 * All angles are computed once: depths are taken in pairs about the middle one, which share their
 * products. Source: Brentjens & de Bruyn 2005, eq. 25 and 36.
 */
export function makeDepthTransform(plan: DepthPlan): (Q: ArrayLike<number>, U: ArrayLike<number>, pixels: number, out?: DepthSpectra) => DepthSpectra {
  const { lambda2M2, factors, weights, referenceLambda2, firstDepth, step, count } = plan;
  const channels = lambda2M2.length;
  const middle = firstDepth + (step * (count - 1)) / 2;
  const pairs = Math.ceil(count / 2);
  // Pair j stands for depths middle +- offset; for an odd count the first is its own mirror.
  const [cosines, sines] = [new Float64Array(pairs * channels), new Float64Array(pairs * channels)];
  const [turnCos, turnSin] = [new Float64Array(channels), new Float64Array(channels)];
  for (let k = 0; k < channels; k++) {
    const square = 2 * (lambda2M2[k] - referenceLambda2);
    turnCos[k] = factors[k] * Math.cos(square * middle);
    turnSin[k] = -factors[k] * Math.sin(square * middle);
    for (let j = 0; j < pairs; j++) {
      const offset = step * (count % 2 === 1 ? j : j + 0.5);
      cosines[j * channels + k] = Math.cos(square * offset);
      sines[j * channels + k] = Math.sin(square * offset);
    }
  }
  const [x, y] = [new Float64Array(channels), new Float64Array(channels)];
  const half = (count - 1) / 2;
  return (Q, U, pixels, out = { re: new Float64Array(count * pixels), im: new Float64Array(count * pixels) }) => {
    for (let pixel = 0; pixel < pixels; pixel++) {
      let seen = 0;
      for (let k = 0, at = pixel; k < channels; k++, at += pixels) {
        const [q, u] = [Q[at], U[at]];
        const known = q - q === 0 && u - u === 0;
        seen += known ? weights[k] : 0;
        x[k] = known ? q * turnCos[k] - u * turnSin[k] : 0;
        y[k] = known ? q * turnSin[k] + u * turnCos[k] : 0;
      }
      const scale = seen > 0.5 ? 1 / seen : NaN;
      for (let j = 0, at = 0; j < pairs; j++) {
        let [xc, xs, yc, ys] = [0, 0, 0, 0];
        for (let k = 0; k < channels; k++, at++) {
          const [c, s] = [cosines[at], sines[at]];
          xc += x[k] * c;
          xs += x[k] * s;
          yc += y[k] * c;
          ys += y[k] * s;
        }
        const offset = count % 2 === 1 ? j : j + 0.5;
        const [above, below] = [(half + offset) * pixels + pixel, (half - offset) * pixels + pixel];
        out.re[above] = scale * (xc + ys);
        out.im[above] = scale * (yc - xs);
        out.re[below] = scale * (xc - ys);
        out.im[below] = scale * (yc + xs);
      }
    }
    return out;
  };
}
