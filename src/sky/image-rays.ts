import { originPoints, type RayBackend, type RayJob, type Watch } from '../ray/job.ts';
import type { RayBundle, RayResult } from '../ray/types.ts';
import { traceFaintToo } from './faint-rays.ts';
import { interpolateAt, interpolateCell, stencilsOf, type Plane } from './lattice.ts';
import { brightnessLevels, type Level } from './brightness-levels.ts';

/** An image whose rays are in the order of its pixels, row by row, and every how many pixels to begin. */
export interface ImageLattice {
  readonly nx: number;
  readonly ny: number;
  /** A power of two; 1 follows all rays. */
  readonly stride: number;
}

/** An image's rays, and how many were followed: the others lie between those. */
export interface ImageRays {
  readonly result: RayResult;
  readonly followed: number;
}

/** Share of the tolerance by which a followed ray may differ from what its neighbours foretell. */
const trustedShare = 0.03;
/** How many times that difference is stated as error: elsewhere in a cell, beside kinks, it was found up to four times as large. */
const statedTimes = 5;
/** Arrays with one plane per frequency that are interpolated where they are wanted. */
const planeNames = ['I', 'Q', 'U', 'heightQ', 'heightU', 'emittedP'] as const;

/**
 * Follows the rays of an image, but not all: first those of a lattice of every `stride`-th pixel in
 * both directions and those amid its cells. Where the lattice foretells the ray amid a cell, and
 * the rays amid all cells around it, to a small share of the tolerance, the cell's pixels are
 * interpolated; elsewhere the cells are halved. Faint pixels are exact beside themselves, as with
 * `traceFaintToo`. The stated error includes the largest difference that was let pass.
 */
export async function traceImage(backend: RayBackend, job: RayJob, size: ImageLattice, watch: Watch): Promise<ImageRays> {
  const { stride } = size;
  const pixels = size.nx * size.ny;
  if (stride < 2) return { result: await traceFaintToo(backend, job, watch), followed: pixels };
  const image = new ThinnedImage(job, size);
  const follow = async (through: RayBackend, wanted: Int32Array): Promise<void> => {
    if (wanted.length === 0) return;
    const { northKpc, eastKpc } = job.bundle;
    const pick = (offsets: Float64Array): Float64Array => Float64Array.from(wanted, (pixel) => offsets[pixel]);
    const bundle: RayBundle = { northKpc: pick(northKpc), eastKpc: pick(eastKpc) };
    const before = image.known;
    const onProgress = (done: number): void => watch.onProgress?.(before + Math.min(done, wanted.length), pixels);
    image.take(wanted, await through({ ...job, bundle }, { signal: watch.signal, onProgress }));
    watch.onProgress?.(image.known, pixels);
  };
  const traceAll = (part: RayJob, partWatch: Watch = {}): Promise<RayResult> => traceFaintToo(backend, part, partWatch);
  let cells = image.allCells(stride);
  await follow(traceAll, image.wantedAtFirst(cells, stride));
  for (let step = stride; step >= 2; step /= 2) {
    const failed = image.test(cells, step);
    const groups = image.wantedByLevel(failed, step);
    image.fill(without(cells, failed, size.nx), step, groups);
    // Rays of one level are followed among themselves: each once, on the scale it needs.
    for (const group of groups) await follow(backend, group);
    cells = failed.flatMap(childrenOf);
  }
  return { result: image.result(), followed: image.followed };
}

/** Row and column of a cell, in cells of its stride. */
type Cell = readonly [row: number, column: number];

/** The four cells of half the stride that a cell is made of. */
function childrenOf([row, column]: Cell): Cell[] {
  return [0, 1, 2, 3].map((k) => [2 * row + (k >> 1), 2 * column + (k & 1)]);
}

function without(cells: readonly Cell[], others: readonly Cell[], nx: number): Cell[] {
  const left = new Set(others.map(([row, column]) => row * nx + column));
  return cells.filter(([row, column]) => !left.has(row * nx + column));
}

/** Fewer rays of a level than this join the next fainter one: to find a scale has its price. */
const fewestOfLevel = 1000;

/** The arrays of an image while its rays come in. */
class ThinnedImage {
  readonly arrays: Record<(typeof planeNames)[number] | 'faradayDepth', Float64Array>;
  known = 0;
  followed = 0;
  private readonly isKnown: Uint8Array;
  private readonly frequencies: number;
  /** Points of the spectrum that have heights of origin. */
  private readonly origins: readonly number[];
  private readonly error: Float64Array;
  private samples = 0;
  private levels: readonly Level[] = [];

  constructor(
    private readonly job: RayJob,
    private readonly size: Pick<ImageLattice, 'nx' | 'ny'>,
  ) {
    const pixels = size.nx * size.ny;
    this.frequencies = job.spectrum.length;
    this.origins = originPoints(job);
    const planes = (): Float64Array => new Float64Array(this.frequencies * pixels);
    const origins = (): Float64Array => new Float64Array(this.origins.length * pixels);
    this.arrays = { I: planes(), Q: planes(), U: planes(), heightQ: origins(), heightU: origins(), emittedP: origins(), faradayDepth: new Float64Array(pixels) };
    this.isKnown = new Uint8Array(pixels);
    this.error = new Float64Array(this.frequencies);
  }

  allCells(stride: number): Cell[] {
    const [rows, columns] = [Math.floor((this.size.ny - 1) / stride), Math.floor((this.size.nx - 1) / stride)];
    return Array.from({ length: rows * columns }, (_, k): Cell => [Math.floor(k / columns), k % columns]);
  }

  /** The nodes of all cells, the pixels amid them, and those beyond the last cells. */
  wantedAtFirst(cells: readonly Cell[], stride: number): Int32Array {
    const { nx, ny } = this.size;
    const wanted = new Set(this.wantedIn(cells, stride));
    const [lastRow, lastColumn] = [ny - 1 - ((ny - 1) % stride), nx - 1 - ((nx - 1) % stride)];
    for (let row = 0; row < ny; row++) for (let column = row > lastRow ? 0 : lastColumn + 1; column < nx; column++) wanted.add(row * nx + column);
    return Int32Array.from(wanted).sort();
  }

  /** Pixels at the nodes and amid some cells that are not known. */
  wantedIn(cells: readonly Cell[], stride: number): Int32Array {
    const { nx } = this.size;
    const wanted = new Set<number>();
    const add = (row: number, column: number): void => {
      const pixel = row * nx + column;
      if (!this.isKnown[pixel]) wanted.add(pixel);
    };
    const half = stride >> 1;
    for (const [row, column] of cells) {
      const [top, left] = [row * stride, column * stride];
      add(top, left);
      add(top, left + stride);
      add(top + stride, left);
      add(top + stride, left + stride);
      if (half > 0) add(top + half, left + half);
    }
    return Int32Array.from(wanted).sort();
  }

  /** What the halves of failed cells want, by the level of the faintest known ray of each; brightest first. */
  wantedByLevel(failed: readonly Cell[], stride: number): Int32Array[] {
    const levelAt = new Map<number, number>();
    for (const cell of failed) {
      const level = this.levels.indexOf(this.levelOf(this.knownOf(cell, stride)));
      for (const pixel of this.wantedIn(childrenOf(cell), stride / 2)) levelAt.set(pixel, Math.max(level, levelAt.get(pixel) ?? 0));
    }
    const groups: number[][] = this.levels.map(() => []);
    for (const [pixel, level] of levelAt) groups[level].push(pixel);
    groups.forEach((group, level) => {
      if (group.length < fewestOfLevel && level + 1 < groups.length) groups[level + 1].push(...group.splice(0));
    });
    return groups.map((group) => Int32Array.from(group).sort());
  }

  /** The pixels of a cell that are followed before it is tested: the one amid, and its corners. */
  private knownOf([row, column]: Cell, stride: number): number[] {
    const { nx } = this.size;
    const half = stride / 2;
    const corners = [0, 1, 2, 3].map((k) => (row + (k >> 1)) * stride * nx + (column + (k & 1)) * stride);
    return [(row * stride + half) * nx + column * stride + half, ...corners];
  }

  /** Takes the rays of some pixels in. */
  take(pixelsOf: Int32Array, part: RayResult): void {
    const pixels = this.isKnown.length;
    for (const name of [...planeNames, 'faradayDepth'] as const) {
      const [whole, own] = [this.arrays[name], part[name]];
      if (whole.length === 0) continue;
      for (let plane = 0; plane * pixels < whole.length; plane++) {
        for (let k = 0; k < pixelsOf.length; k++) whole[plane * pixels + pixelsOf[k]] = own[plane * pixelsOf.length + k];
      }
    }
    for (const pixel of pixelsOf) this.isKnown[pixel] = 1;
    for (let k = 0; k < this.frequencies; k++) this.error[k] = Math.max(this.error[k], part.error[k]);
    this.samples += part.samples;
    this.known += pixelsOf.length;
    this.followed += pixelsOf.length;
    if (this.levels.length === 0) this.levels = brightnessLevels(part, this.frequencies);
  }

  /** The cells of which the lattice does not foretell the ray amid, and all around those. */
  test(cells: readonly Cell[], stride: number): Cell[] {
    const { nx, ny } = this.size;
    const [rows, columns] = [Math.floor((ny - 1) / stride), Math.floor((nx - 1) / stride)];
    const [rowStencils, columnStencils] = [stencilsOf(rows, stride), stencilsOf(columns, stride)];
    const allowed = trustedShare * this.job.scene.numerics.tolerance;
    const levels = cells.map((cell) => this.levelOf(this.knownOf(cell, stride)));
    const misses = Array.from({ length: this.frequencies }, () => new Float64Array(cells.length));
    const failed = new Uint8Array(rows * columns);
    const half = stride / 2;
    this.forEachPlane((values, start, frequency, scaleOf) => {
      const plane: Plane = { values, start, nx, stride };
      cells.forEach(([row, column], k) => {
        if (failed[row * columns + column]) return;
        const foretold = interpolateAt(plane, rowStencils[row], columnStencils[column], half, half);
        const miss = Math.abs(foretold - values[start + (row * stride + half) * nx + column * stride + half]) / scaleOf(levels[k]);
        if (!(miss <= allowed)) failed[row * columns + column] = 1;
        else misses[frequency][k] = Math.max(misses[frequency][k], miss);
      });
    });
    const fails = (row: number, column: number): boolean => row >= 0 && row < rows && column >= 0 && column < columns && failed[row * columns + column] === 1;
    return cells.filter(([row, column], k) => {
      for (let i = -1; i <= 1; i++) for (let j = -1; j <= 1; j++) if (fails(row + i, column + j)) return true;
      misses.forEach((miss, frequency) => (this.error[frequency] = Math.max(this.error[frequency], statedTimes * miss[k])));
      return false;
    });
  }

  /** Every plane that is wanted, with what its errors are measured against at a level. */
  private forEachPlane(take: (values: Float64Array, start: number, frequency: number, scaleOf: (level: Level) => number) => void): void {
    const height = this.job.scene.galaxy.volume.heightKpc;
    const pixels = this.isKnown.length;
    const { I, Q, U, heightQ, heightU, emittedP } = this.arrays;
    for (let k = 0; k < this.frequencies; k++) {
      take(I, k * pixels, k, (level) => level.I[k]);
      for (const values of [Q, U]) take(values, k * pixels, k, (level) => level.P[k]);
    }
    this.origins.forEach((k, plane) => {
      for (const values of [heightQ, heightU]) take(values, plane * pixels, k, (level) => height * level.P[k]);
      take(emittedP, plane * pixels, k, (level) => level.I[k]);
    });
    take(this.arrays.faradayDepth, 0, 0, (level) => level.depth);
  }

  /** The level of the faintest of some pixels. */
  private levelOf(pixelsOf: readonly number[]): Level {
    const faintest = Math.min(...pixelsOf.map((pixel) => this.arrays.I[pixel]));
    return this.levels.find((level) => faintest >= level.faintest) ?? this.levels[this.levels.length - 1];
  }

  /** Interpolates what is not known in some cells, `left`, which comes next, excepted. */
  fill(cells: readonly Cell[], stride: number, left: readonly Int32Array[]): void {
    const { nx, ny } = this.size;
    const [rowStencils, columnStencils] = [stencilsOf(Math.floor((ny - 1) / stride), stride), stencilsOf(Math.floor((nx - 1) / stride), stride)];
    for (const group of left) for (const pixel of group) this.isKnown[pixel] = 1;
    const claims = cells.map((cell) => this.claim(cell, stride));
    const filled = new Float64Array((stride + 1) ** 2);
    // Plane by plane, so that neighbouring cells find their nodes in cache.
    for (const name of [...planeNames, 'faradayDepth'] as const) {
      const values = this.arrays[name];
      for (let start = 0; start < values.length; start += this.isKnown.length) {
        const plane: Plane = { values, start, nx, stride };
        cells.forEach(([row, column], k) => {
          const claim = claims[k];
          if (claim.length === 0) return;
          interpolateCell(plane, rowStencils[row], columnStencils[column], filled);
          const corner = start + row * stride * nx + column * stride;
          for (const place of claim) values[corner + Math.floor(place / (stride + 1)) * nx + (place % (stride + 1))] = filled[place];
        });
      }
    }
  }

  /** The places within a cell, [row * (stride + 1) + column], that are not known; they count as known from now on. */
  private claim([row, column]: Cell, stride: number): number[] {
    const { nx } = this.size;
    const side = stride + 1;
    const places: number[] = [];
    for (let place = 0; place < side * side; place++) {
      const pixel = (row * stride + Math.floor(place / side)) * nx + column * stride + (place % side);
      if (this.isKnown[pixel]) continue;
      this.isKnown[pixel] = 1;
      places.push(place);
    }
    this.known += places.length;
    return places;
  }

  result(): RayResult {
    return { ...this.arrays, error: this.error, samples: this.samples };
  }
}
