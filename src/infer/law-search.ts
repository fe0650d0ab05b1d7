import type { Law, LawParameter } from '../measure/laws/types.ts';

/** A complex spectrum with the rms of its real and of its imaginary part, channel by channel. */
export interface FractionSpectrum {
  readonly lambda2M2: Float64Array;
  readonly q: Float64Array;
  readonly u: Float64Array;
  readonly sigma: Float64Array;
}

/**
 * Finds where fits of a law to spectra of the same channels should start. A law is linear in its
 * complex fractions p e^{2 i chi}, so that a coarse lattice over its other parameters suffices: at
 * every point of it the best fractions follow in closed form (Golub & Pereyra 1973).
 */
export interface LawSearch {
  readonly law: Law;
  readonly lambda2M2: Float64Array;
  readonly sigma: Float64Array;
  /** Values of the lattice, per parameter that is not a fraction or an angle. */
  readonly axes: readonly (readonly number[])[];
  readonly shape: (point: number) => Shape;
}

/** A law at one point of the lattice with its fractions 1, over sigma, [fraction * channels + channel]. */
interface Shape {
  readonly re: Float64Array;
  readonly im: Float64Array;
  /** Sums of squares of both fractions' shapes, and of their product f1* f2. */
  readonly first: number;
  readonly second: number;
  readonly crossRe: number;
  readonly crossIm: number;
}

const shareOfStep = 0.8;
const mostRotations = 400;
const mostRotationsOfTwo = 60;
const mostRotationsWithWidths = 24;
const mostCached = 4e6;
const mostOverData = 4;

/** The largest |q + iu| of a spectrum. */
export function largestFraction(q: Float64Array, u: Float64Array): number {
  return q.reduce((most, value, k) => Math.max(most, Math.hypot(value, u[k])), 0);
}

/** Makes the search for a law, over depths up to `largestDepth`, rad m^-2. */
export function makeLawSearch(law: Law, lambda2M2: Float64Array, sigma: Float64Array, largestDepth: number): LawSearch {
  const other = law.parameters.filter(({ role }) => role !== 'fraction' && role !== 'angle');
  const axes = other.map((parameter) => latticeValues(parameter, other, lambda2M2, largestDepth));
  const fractions = law.parameters.filter(({ role }) => role === 'fraction').length;
  const points = axes.reduce((product, axis) => product * axis.length, 1);
  const cache: Shape[] | undefined = points * fractions * lambda2M2.length * 2 < mostCached ? [] : undefined;
  const shape = (point: number): Shape => {
    const known = cache?.[point];
    if (known) return known;
    const made = shapeAt(law, valuesAt(law, axes, point), fractions, lambda2M2, sigma);
    if (cache) cache[point] = made;
    return made;
  };
  return { law, lambda2M2, sigma, axes, shape };
}

/** Starting values for a spectrum: local maxima of the lattice, then its other best points apart from them; `most` in all. */
export function startingValues(search: LawSearch, { q, u }: Pick<FractionSpectrum, 'q' | 'u'>, most: number): Float64Array[] {
  const { law, axes, sigma } = search;
  const [x, y] = [q.map((value, k) => value / sigma[k]), u.map((value, k) => value / sigma[k])];
  const points = axes.reduce((product, axis) => product * axis.length, 1);
  const gains = new Float64Array(points);
  // Two shapes that are nearly one fit noise by huge fractions that cancel: not a place to start.
  const most2 = (mostOverData * largestFraction(q, u)) ** 2;
  for (let point = 0; point < points; point++) {
    const { gain, re, im } = bestFractions(search.shape(point), x, y);
    gains[point] = re.every((value, k) => value * value + im[k] * im[k] <= most2) ? gain : -1;
  }
  const order = Array.from(gains.keys()).sort((a, b) => gains[b] - gains[a]);
  // Half of them at local maxima; the others where a valley hides one from the lattice.
  const isAllowed = (point: number): boolean => gains[point] >= 0 || point === order[0];
  const peaks: number[] = [];
  for (const point of order) {
    if (peaks.length >= most / 2 || !isAllowed(point)) break;
    if (neighbours(axes, point).every((other) => gains[other] <= gains[point])) peaks.push(point);
  }
  const chosen = new Set(peaks);
  const taken = new Set(peaks.flatMap((point) => [point, ...neighbours(axes, point)]));
  for (const point of order) {
    if (chosen.size >= most || !isAllowed(point)) break;
    if (taken.has(point)) continue;
    chosen.add(point);
    for (const other of [point, ...neighbours(axes, point)]) taken.add(other);
  }
  const starts: Float64Array[] = [];
  for (const point of chosen) {
    const values = valuesAt(law, axes, point);
    const { re, im } = bestFractions(search.shape(point), x, y);
    let fraction = 0;
    law.parameters.forEach(({ role }, k) => {
      if (role === 'fraction') values[k] = Math.hypot(re[fraction], im[fraction]);
      if (role === 'angle') {
        values[k] = Math.atan2(im[fraction], re[fraction]) / 2;
        fraction++;
      }
    });
    starts.push(values);
  }
  return starts;
}

function latticeValues({ role, min, max }: LawParameter, all: readonly LawParameter[], lambda2M2: Float64Array, largestDepth: number): number[] {
  const [low, high] = [Math.min(...lambda2M2), Math.max(...lambda2M2)];
  const rotations = all.filter((parameter) => parameter.role === 'rotation').length;
  const inside = (values: readonly number[]): number[] => values.filter((value) => value >= min && value <= max);
  if (role === 'rotation') {
    const hasWidths = all.some((parameter) => parameter.role === 'width');
    const most = rotations === 1 ? mostRotations : hasWidths ? mostRotationsWithWidths : mostRotationsOfTwo;
    const count = Math.max(1, Math.min(Math.ceil((largestDepth * (high - low)) / shareOfStep), most / 2));
    return inside(Array.from({ length: 2 * count + 1 }, (_, k) => (largestDepth * (k - count)) / count));
  }
  if (role === 'width') {
    // From what hardly shows at the longest wavelength to what hides all but the shortest.
    const [from, to] = [0.25 / high, 2 / low];
    const most = rotations > 1 ? 3 : 12;
    const count = Math.max(2, Math.min(most, Math.ceil(Math.log(to / from) / Math.log(1.6)) + 1));
    return inside(Array.from({ length: count }, (_, k) => from * (to / from) ** (k / (count - 1))));
  }
  if (role === 'share') return [0.25, 0.5, 0.75, 0.95];
  if (role === 'ratio') return inside([0.25, 0.5, 1, 1.5, 2.5, 5]);
  return inside([-6, -4.5, -3, -1.5, 0, 1.5, 3, 4.5, 6]);
}

function indices(axes: readonly (readonly number[])[], point: number): number[] {
  let rest = point;
  return axes.map((axis) => {
    const index = rest % axis.length;
    rest = (rest - index) / axis.length;
    return index;
  });
}

/** The points about a point of the lattice, along all axes and diagonals. */
function neighbours(axes: readonly (readonly number[])[], point: number): number[] {
  const index = indices(axes, point);
  let found = [0];
  let stride = 1;
  axes.forEach((axis, k) => {
    const steps = [-1, 0, 1].filter((step) => index[k] + step >= 0 && index[k] + step < axis.length);
    found = steps.flatMap((step) => found.map((offset) => offset + step * stride));
    stride *= axis.length;
  });
  return found.filter((offset) => offset !== 0).map((offset) => point + offset);
}

function valuesAt(law: Law, axes: readonly (readonly number[])[], point: number): Float64Array {
  const index = indices(axes, point);
  let next = 0;
  return Float64Array.from(law.parameters, ({ role }) => {
    if (role === 'fraction' || role === 'angle') return 0;
    const value = axes[next][index[next]];
    next++;
    return value;
  });
}

function shapeAt(law: Law, values: Float64Array, fractions: number, lambda2M2: Float64Array, sigma: Float64Array): Shape {
  const channels = lambda2M2.length;
  const [re, im] = [new Float64Array(fractions * channels), new Float64Array(fractions * channels)];
  const places = law.parameters.flatMap(({ role }, k) => (role === 'fraction' ? [k] : []));
  places.forEach((place, fraction) => {
    const one = values.slice();
    one[place] = 1;
    lambda2M2.forEach((square, k) => {
      const value = law.value(square, one);
      re[fraction * channels + k] = value.re / sigma[k];
      im[fraction * channels + k] = value.im / sigma[k];
    });
  });
  let [first, second, crossRe, crossIm] = [0, 0, 0, 0];
  for (let k = 0; k < channels; k++) {
    first += re[k] * re[k] + im[k] * im[k];
    if (fractions < 2) continue;
    const other = channels + k;
    second += re[other] * re[other] + im[other] * im[other];
    crossRe += re[k] * re[other] + im[k] * im[other];
    crossIm += re[k] * im[other] - im[k] * re[other];
  }
  return { re, im, first, second, crossRe, crossIm };
}

/** One or two complex fractions that fit best, and by how much they lower chi^2. */
function bestFractions(shape: Shape, x: Float64Array, y: Float64Array): { gain: number; re: readonly number[]; im: readonly number[] } {
  const { re, im, first, second, crossRe, crossIm } = shape;
  const n = x.length;
  let [aRe, aIm, bRe, bIm] = [0, 0, 0, 0];
  for (let k = 0; k < n; k++) {
    aRe += re[k] * x[k] + im[k] * y[k];
    aIm += re[k] * y[k] - im[k] * x[k];
  }
  const determinant = first * second - crossRe * crossRe - crossIm * crossIm;
  if (!(determinant > 1e-9 * first * second)) {
    // One fraction, or two shapes that cannot be told apart.
    const norm = first > 0 ? 1 / first : 0;
    return { gain: (aRe * aRe + aIm * aIm) * norm, re: [aRe * norm, 0], im: [aIm * norm, 0] };
  }
  for (let k = 0; k < n; k++) {
    bRe += re[n + k] * x[k] + im[n + k] * y[k];
    bIm += re[n + k] * y[k] - im[n + k] * x[k];
  }
  // [first cross; cross* second] (f, g) = (a, b).
  const fRe = (second * aRe - (crossRe * bRe - crossIm * bIm)) / determinant;
  const fIm = (second * aIm - (crossRe * bIm + crossIm * bRe)) / determinant;
  const gRe = (first * bRe - (crossRe * aRe + crossIm * aIm)) / determinant;
  const gIm = (first * bIm - (crossRe * aIm - crossIm * aRe)) / determinant;
  return { gain: aRe * fRe + aIm * fIm + bRe * gRe + bIm * gIm, re: [fRe, gRe], im: [fIm, gIm] };
}
