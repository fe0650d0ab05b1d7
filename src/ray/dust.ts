import { boltzmannConstant, jansky, planckConstant, speedOfLight } from '../units/constants.ts';

const seriesTerms = 24;
/** Below this mean over rms the series serves, far above it the first terms of the asymptotic one. */
const seriesBelow = 2;
const asymptoticAbove = 25;
const dawsonStep = 0.25;

/**
 * How well directions keep to that of the mean field: the mean of (3 cos²θ - 1)/2 for a mean field with an
 * isotropic Gaussian one of rms σ in each component, b = B/σ. 1 - 3/b² + (3√2/b³) D(b/√2) with Dawson's
 * integral D (own derivation; in the mean of B_i B_j/B² it multiplies the traceless part).
 */
export function directionOrder(b: number): number {
  const square = b * b;
  if (b < seriesBelow) {
    let [sum, term] = [0, 1];
    for (let k = 1; k <= seriesTerms; k++) {
      term *= -square / (2 * k + 1);
      if (k >= 2) sum += term;
    }
    return b === 0 ? 0 : (3 * sum) / square;
  }
  if (b > asymptoticAbove) return 1 - 3 / square + (3 / (square * square)) * (1 + 1 / square + 3 / (square * square));
  return 1 - 3 / square + ((3 * Math.SQRT2) / (square * b)) * dawson(b / Math.SQRT2);
}

/** Dawson's integral e^{-x²} ∫_0^x e^{t²} dt as a sum of Gaussians (Rybicki 1989), to 1e-15. */
function dawson(x: number): number {
  const reach = Math.ceil(7 / dawsonStep);
  const middle = Math.round(x / dawsonStep);
  let sum = 0;
  for (let n = middle - reach; n <= middle + reach; n++) {
    if (n % 2 !== 0) sum += Math.exp(-((x - n * dawsonStep) ** 2)) / n;
  }
  return sum / Math.sqrt(Math.PI);
}

/** Planck's brightness of a black body, Jy/sr. */
export function planckBrightness(temperatureK: number, frequencyHz: number): number {
  const energy = planckConstant.value * frequencyHz;
  return (2 * energy * (frequencyHz / speedOfLight.value) ** 2) / Math.expm1(energy / (boltzmannConstant.value * temperatureK)) / jansky.value;
}
