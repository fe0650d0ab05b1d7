import { erf } from './special.ts';

/** Share of a unit Gaussian below x. */
export function normalShare(x: number): number {
  return (1 + erf(x / Math.SQRT2)) / 2;
}

/** Beyond these a double tells no share of a Gaussian from 0 or 1. */
const farthest = 8.2;

/** The x below which `share` of a unit Gaussian lies, by Newton steps kept within a bracket; +-8.2 at the ends. */
export function normalQuantile(share: number): number {
  let [low, high] = [-farthest, farthest];
  if (!(share > normalShare(low))) return low;
  if (!(share < normalShare(high))) return high;
  let x = 0;
  for (let step = 0; step < 100; step++) {
    const off = normalShare(x) - share;
    if (off === 0) return x;
    if (off > 0) high = x;
    else low = x;
    const next = x - off * Math.sqrt(2 * Math.PI) * Math.exp((x * x) / 2);
    const kept = next > low && next < high ? next : (low + high) / 2;
    if (Math.abs(kept - x) <= 1e-15 * Math.max(1, Math.abs(x))) return kept;
    x = kept;
  }
  return x;
}
