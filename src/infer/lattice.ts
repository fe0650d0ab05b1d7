import type { Beam } from '../scene/types.ts';
import { beamAxes, beamPixels } from './pixel-axes.ts';
import type { BeamAxes, PixelAxes } from './pixel-axes.ts';

/** Radius of a window, in FWHM: it is cut where it has fallen to 0.0008. */
export const windowRadius = 1.6;
/** Spacing of the lattice in FWHM along each principal axis: one point per beam solid angle. */
export const latticeSpacing = Math.sqrt(Math.PI / (4 * Math.LN2));
/** A window that sees less than this share of itself is dropped. */
const leastShare = 0.5;

/**
 * Points one beam solid angle apart, each with a Gaussian window of the beam's shape over the
 * unmasked pixels (own design): the basis in which maps are compared.
 */
export interface Lattice {
  readonly count: number;
  /** Whole-number coordinates of each point in the lattice: slow and fast, in storage order. */
  readonly slow: Int32Array;
  readonly fast: Int32Array;
  /** Position in the beam's principal axes, FWHM. */
  readonly xi: Float64Array;
  readonly eta: Float64Array;
  /** Its place in the map, from 0, not whole. */
  readonly column: Float64Array;
  readonly row: Float64Array;
  /** Window of point a: entries start[a] to start[a + 1] of `pixel` and `weight`, which sum to 1. */
  readonly start: Int32Array;
  readonly pixel: Int32Array;
  readonly weight: Float64Array;
  /** Unmasked area over the beam's solid angle: the number of independent values in a plane. */
  readonly beams: number;
}

/**
 * The lattice of a beam on a grid. `unmasked` [row * nx + column] is 1 where there are data. Of four
 * phases (points on the image's centre, or half a spacing off in either axis) the one is taken whose
 * number of points is nearest to area/solid angle.
 */
export function makeLattice(axes: PixelAxes, beam: Beam, unmasked: Uint8Array): Lattice {
  const toBeam = beamAxes(axes, beam);
  const pixelsPerBeam = beamPixels(axes, beam);
  const beams = unmasked.reduce((sum, value) => sum + value, 0) / pixelsPerBeam;
  let best: Lattice | undefined;
  for (const phase of [[0, 0], [0.5, 0], [0, 0.5], [0.5, 0.5]]) {
    const lattice = latticeAt(axes, toBeam, unmasked, phase[0], phase[1], pixelsPerBeam, beams);
    if (!best || Math.abs(lattice.count - beams) < Math.abs(best.count - beams)) best = lattice;
  }
  return best!;
}

function latticeAt(
  axes: PixelAxes, toBeam: BeamAxes, unmasked: Uint8Array,
  phaseXi: number, phaseEta: number, pixelsPerBeam: number, beams: number,
): Lattice {
  const { nx, ny } = axes;
  const { xi: x, eta: e } = toBeam;
  const centre = (c: readonly [number, number]): number => (c[0] * (nx - 1) + c[1] * (ny - 1)) / 2;
  const half = (c: readonly [number, number]): number => (Math.abs(c[0]) * nx + Math.abs(c[1]) * ny) / 2;
  const reachXi = Math.ceil(half(x) / latticeSpacing) + 1;
  const reachEta = Math.ceil(half(e) / latticeSpacing) + 1;
  // The slow index runs over the longer side, which keeps the band of the covariance narrow.
  const xiIsSlow = half(x) > half(e);
  const full = pixelsPerBeam * (1 - Math.exp(-4 * Math.LN2 * windowRadius ** 2));
  const points = { slow: [] as number[], fast: [] as number[], xi: [] as number[], eta: [] as number[] };
  const start = [0];
  const pixel: number[] = [];
  const weight: number[] = [];
  const visit = windowVisitor(axes, toBeam);
  const [slowReach, fastReach] = xiIsSlow ? [reachXi, reachEta] : [reachEta, reachXi];
  for (let slow = -slowReach; slow <= slowReach; slow++) {
    for (let fast = -fastReach; fast <= fastReach; fast++) {
      const xi = centre(x) + ((xiIsSlow ? slow : fast) + phaseXi) * latticeSpacing;
      const eta = centre(e) + ((xiIsSlow ? fast : slow) + phaseEta) * latticeSpacing;
      const before = pixel.length;
      let sum = 0;
      visit(xi, eta, (index, value) => {
        if (unmasked[index] === 0) return;
        pixel.push(index);
        weight.push(value);
        sum += value;
      });
      if (sum < leastShare * full) {
        pixel.length = before;
        weight.length = before;
        continue;
      }
      for (let k = before; k < weight.length; k++) weight[k] /= sum;
      points.slow.push(slow);
      points.fast.push(fast);
      points.xi.push(xi);
      points.eta.push(eta);
      start.push(pixel.length);
    }
  }
  const determinant = x[0] * e[1] - x[1] * e[0];
  return {
    count: points.slow.length,
    slow: Int32Array.from(points.slow),
    fast: Int32Array.from(points.fast),
    xi: Float64Array.from(points.xi),
    eta: Float64Array.from(points.eta),
    column: Float64Array.from(points.xi, (xi, k) => (xi * e[1] - points.eta[k] * x[1]) / determinant),
    row: Float64Array.from(points.xi, (xi, k) => (points.eta[k] * x[0] - xi * e[0]) / determinant),
    start: Int32Array.from(start),
    pixel: Int32Array.from(pixel),
    weight: Float64Array.from(weight),
    beams,
  };
}

/** Calls back with the pixels inside a window centred on (xi, eta), FWHM, and the window's value there. */
function windowVisitor(axes: PixelAxes, toBeam: BeamAxes) {
  const { nx, ny } = axes;
  const { xi: x, eta: e } = toBeam;
  const determinant = x[0] * e[1] - x[1] * e[0];
  // Half sides, in pixels, of the box around the window's ellipse.
  const reachColumn = (windowRadius * Math.hypot(x[1], e[1])) / Math.abs(determinant);
  const reachRow = (windowRadius * Math.hypot(x[0], e[0])) / Math.abs(determinant);
  return (xi: number, eta: number, each: (index: number, value: number) => void): void => {
    const column = (xi * e[1] - eta * x[1]) / determinant;
    const row = (eta * x[0] - xi * e[0]) / determinant;
    const lastRow = Math.min(ny - 1, Math.floor(row + reachRow));
    const lastColumn = Math.min(nx - 1, Math.floor(column + reachColumn));
    for (let j = Math.max(0, Math.ceil(row - reachRow)); j <= lastRow; j++) {
      for (let i = Math.max(0, Math.ceil(column - reachColumn)); i <= lastColumn; i++) {
        const dXi = x[0] * i + x[1] * j - xi;
        const dEta = e[0] * i + e[1] * j - eta;
        const square = dXi * dXi + dEta * dEta;
        if (square <= windowRadius ** 2) each(j * nx + i, Math.exp(-4 * Math.LN2 * square));
      }
    }
  };
}

/** Window means of a map [row * nx + column] at the points of a lattice, in the map's unit. */
export function windowMeans(lattice: Lattice, map: Float64Array): Float64Array {
  const { count, start, pixel, weight } = lattice;
  const means = new Float64Array(count);
  for (let a = 0; a < count; a++) {
    let sum = 0;
    for (let k = start[a]; k < start[a + 1]; k++) sum += weight[k] * map[pixel[k]];
    means[a] = sum;
  }
  return means;
}
