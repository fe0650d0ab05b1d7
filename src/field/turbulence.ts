import { synthesizeCube, zeroCube, type ComplexCube } from '../math/fft-cube.ts';
import { randomStream } from '../math/random.ts';
import { firstSample, gridStrides, interpolateGrid, makeCoefficients, type SplineGrid } from '../math/spline-grid.ts';
import { eachMode, verticalWeight, type TurbulenceSpectrum } from './turbulence-spectrum.ts';

/** A random field to be drawn: equal specifications give equal fields, wherever they are drawn. */
export interface TurbulenceDraw extends TurbulenceSpectrum {
  readonly seed: number;
  /** Which of the many fields of a seed. */
  readonly realisation: number;
  /** Points along a side of the grid, a power of two of at least 3 `last`. */
  readonly cells: number;
  /** Correlation of the logarithm of n_e with the strength of the field; no fluctuations of n_e where absent. */
  readonly electronCorrelation?: number;
}

/** A periodic random field as grids over its box, coordinates counted in samples. */
export interface TurbulenceGrids {
  /** Components of the vector potential, for a box of side 1: B = curl A has an expected rms of 1 along x and y. */
  readonly potential: readonly [SplineGrid, SplineGrid, SplineGrid];
  /** Gaussian of zero mean and expected variance 1, for the logarithm of n_e. */
  readonly electrons?: SplineGrid;
}

/** What tells draws apart. */
export function drawKey(draw: TurbulenceDraw): string {
  const { seed, realisation, cells, slope, first, last, verticalRatio, electronCorrelation } = draw;
  return JSON.stringify([seed, realisation, cells, slope, first, last, verticalRatio, electronCorrelation ?? null]);
}

/**
 * Draws a divergence-free Gaussian random field: white noise, projected across k in Fourier space
 * (physics.md section 4, item 10), as the B-spline coefficients of its potential A = i k × B/k², so
 * that the field between the grid's points is free of divergence too. Coefficients are divided by
 * the splines' own response, so that every wave has its full amplitude between points also. The
 * rms is that of the ensemble: a box of few waves may have a little more or less. Random numbers are
 * keyed by (seed, realisation, wave vector): a finer grid adds waves and keeps those there are.
 */
export function drawTurbulence(draw: TurbulenceDraw): TurbulenceGrids {
  const { cells, electronCorrelation } = draw;
  const [first, second] = [zeroCube(cells), zeroCube(cells)];
  fillModes(draw, first, second);
  synthesizeCube(first);
  synthesizeCube(second);
  const key = drawKey(draw);
  const potential = [first.real, first.imaginary, second.real].map((values, k) => coefficientGrid(`${key}/a${k}`, values, cells)) as unknown as TurbulenceGrids['potential'];
  if (electronCorrelation === undefined) return { potential };
  const values = correlate(second.imaginary, potential, draw, electronCorrelation);
  return { potential, electrons: interpolateGrid(`${key}/n`, values, [cells, cells, cells], ['periodic', 'periodic', 'periodic']) };
}

/** A column's number, for its stream of random numbers. */
function columnIndex(kx: number, ky: number): number {
  return kx * 65536 + ky + 32768;
}

/** Writes A_x + i A_y to one cube, A_z + i (noise of n_e) to the other. */
function fillModes(draw: TurbulenceDraw, first: ComplexCube, second: ComplexCube): void {
  const { cells, slope, seed, realisation, electronCorrelation } = draw;
  const weight = verticalWeight(draw.verticalRatio);
  const { field, scalar } = amplitudes(draw, weight);
  const response = splineResponse(cells);
  const name = `turbulence/${realisation}`;
  let stream = randomStream(seed, name);
  eachMode(
    draw,
    (kx, ky) => (stream = randomStream(seed, name, columnIndex(kx, ky))),
    (kx, ky, kz, square) => {
      const noise = [1, 1, weight].map((w) => [w * stream.gaussian(), w * stream.gaussian()] as const);
      const [p, q] = [stream.gaussian(), stream.gaussian()];
      const spectrum = Math.pow(square, -slope / 4);
      // A = i k × b/k²: the cross product removes what of the noise lies along k.
      const size = (field * spectrum) / (2 * Math.PI * square * response(kx) * response(ky) * response(kz));
      const part = (u: number, v: number, a: number, b: number): readonly [number, number] => [-size * (u * noise[b][1] - v * noise[a][1]), size * (u * noise[b][0] - v * noise[a][0])];
      const ax = part(ky, kz, 1, 2);
      const ay = part(kz, kx, 2, 0);
      const az = part(kx, ky, 0, 1);
      const size2 = electronCorrelation === undefined ? 0 : scalar * spectrum;
      const [here, mirror] = [place(cells, kx, ky, kz), place(cells, -kx, -ky, -kz)];
      setPair(first, here, mirror, ax, ay);
      setPair(second, here, mirror, az, [size2 * p, size2 * q]);
    },
  );
}

function place(cells: number, kx: number, ky: number, kz: number): number {
  const wrap = (k: number): number => (k < 0 ? k + cells : k);
  return (wrap(kx) * cells + wrap(ky)) * cells + wrap(kz);
}

/** f + i g for real functions with coefficients f and g at k and their conjugates at -k. */
function setPair({ real, imaginary }: ComplexCube, here: number, mirror: number, [fr, fi]: readonly [number, number], [gr, gi]: readonly [number, number]): void {
  real[here] = fr - gi;
  imaginary[here] = fi + gr;
  real[mirror] = fr + gi;
  imaginary[mirror] = gr - fi;
}

/** Amplitudes that give an expected rms of 1: of B along x and y, and of a scalar of the same spectrum. */
function amplitudes(draw: TurbulenceDraw, weight: number): { field: number; scalar: number } {
  let [plane, all] = [0, 0];
  eachMode(
    draw,
    () => undefined,
    (kx, ky, kz, square) => {
      const power = Math.pow(square, -draw.slope / 2);
      // Diagonal of (1 - k̂k̂) diag(1, 1, w²) (1 - k̂k̂), mean of x and y.
      const [x, y, z] = [(kx * kx) / square, (ky * ky) / square, (kz * kz) / square];
      const across = (1 - x) ** 2 + (1 - y) ** 2 + 2 * x * y + weight * weight * z * (x + y);
      // Each mode stands for itself and its mirror image; both parts of the noise have variance 1.
      plane += 4 * power * (across / 2);
      all += 4 * power;
    },
  );
  return { field: 1 / Math.sqrt(plane), scalar: 1 / Math.sqrt(all) };
}

/** Fourier transform of the cubic B-spline at k waves in so many cells: sinc⁴. */
function splineResponse(cells: number): (k: number) => number {
  const table = Float64Array.from({ length: cells }, (_, k) => (k === 0 ? 1 : (Math.sin((Math.PI * k) / cells) / ((Math.PI * k) / cells)) ** 4));
  return (k) => table[Math.abs(k)];
}

/** Coefficients over a period put among their periodic neighbours. */
function coefficientGrid(key: string, values: Float32Array, cells: number): SplineGrid {
  const axes = [0, 1, 2].map(() => ({ points: cells, periodic: true }));
  const grid = { key, axes, coefficients: makeCoefficients(axes) };
  const strides = gridStrides(grid);
  const before = firstSample(axes[0]);
  const stored = cells + 3;
  const wrap = (k: number): number => (k - before + cells) % cells;
  for (let i = 0; i < stored; i++) {
    for (let j = 0; j < stored; j++) {
      const from = (wrap(i) * cells + wrap(j)) * cells;
      const to = i * strides[0] + j * strides[1];
      grid.coefficients.set(values.subarray(from, from + cells), to + before);
      grid.coefficients[to] = values[from + cells - 1];
      for (let k = cells + before; k < stored; k++) grid.coefficients[to + k] = values[from + wrap(k)];
    }
  }
  return grid;
}

/**
 * Joins Gaussian noise with the strength of the field at the grid's points: c q + √(1 - c²) noise,
 * where q is the strength made Gaussian, ((B²/⟨B²⟩)^{1/3} - 1 + 2/27)/√(2/27) (Wilson & Hilferty 1931 for
 * three degrees of freedom). Log-normal n_e that goes with or against the field: Beck et al. 2003.
 */
function correlate(noise: Float32Array, potential: TurbulenceGrids['potential'], { cells, verticalRatio }: TurbulenceDraw, correlation: number): Float32Array {
  if (correlation === 0) return noise;
  const rest = Math.sqrt(1 - correlation * correlation);
  const spread = 2 / 27;
  const meanSquare = 2 + verticalRatio * verticalRatio;
  const squares = fieldSquares(potential, cells);
  for (let k = 0; k < noise.length; k++) {
    const q = (Math.cbrt(squares[k] / meanSquare) - 1 + spread) / Math.sqrt(spread);
    noise[k] = correlation * q + rest * noise[k];
  }
  return noise;
}

/** B² at the points of the grid: curl of the splines there, whose weights are (1, 4, 1)/6 and (-1, 0, 1)/2. */
function fieldSquares(potential: TurbulenceGrids['potential'], cells: number): Float32Array {
  const strides = gridStrides(potential[0]);
  const squares = new Float32Array(cells ** 3);
  const across = strides.map((_, axis) => strides.filter((_, k) => k !== axis));
  const slope = ({ coefficients }: SplineGrid, at: number, axis: number): number => {
    const stride = strides[axis];
    const [p, q] = across[axis];
    return ((faceSum(coefficients, at + stride, p, q) - faceSum(coefficients, at - stride, p, q)) / 72) * cells;
  };
  const [ax, ay, az] = potential;
  for (let i = 0, to = 0; i < cells; i++) {
    for (let j = 0; j < cells; j++) {
      for (let k = 0; k < cells; k++, to++) {
        const at = (i + 1) * strides[0] + (j + 1) * strides[1] + k + 1;
        const bx = slope(az, at, 1) - slope(ay, at, 2);
        const by = slope(ax, at, 2) - slope(az, at, 0);
        const bz = slope(ay, at, 0) - slope(ax, at, 1);
        squares[to] = bx * bx + by * by + bz * bz;
      }
    }
  }
  return squares;
}

/** Nine coefficients of a plane with the weights (1, 4, 1) along both axes. */
function faceSum(c: SplineGrid['coefficients'], at: number, p: number, q: number): number {
  const corners = c[at - p - q] + c[at - p + q] + c[at + p - q] + c[at + p + q];
  const edges = c[at - p] + c[at + p] + c[at - q] + c[at + q];
  return corners + 4 * edges + 16 * c[at];
}
