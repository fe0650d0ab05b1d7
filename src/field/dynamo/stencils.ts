import type { MeridionalGrid } from './grid.ts';

/** A node, i + j · radii, with what its value is multiplied by. */
export interface Weight {
  readonly node: number;
  readonly weight: number;
}

/** The face between a node and a neighbour. */
export interface Face {
  readonly isRadial: boolean;
  readonly neighbour: number;
  /** +1 where the neighbour lies outward or above, -1 inward or below. */
  readonly outward: 1 | -1;
  /** (1/r) d(r f)/dr or df/dz on the face. */
  readonly slope: readonly Weight[];
  /** Distance between the two nodes, kpc. */
  readonly span: number;
  /** Width of the node's cell across the face, kpc: Σ outward · flux/width is the divergence. */
  readonly width: number;
  readonly radiusKpc: number;
  readonly heightKpc: number;
}

/**
 * The faces of a node: two along each direction, one at an end. A cell at an end of the heights is half
 * as wide and nothing passes its end, as is right for what is the same on both sides.
 */
export function facesOf(grid: MeridionalGrid, i: number, j: number): readonly Face[] {
  const faces: Face[] = [];
  if (j > 0) faces.push(verticalFace(grid, i, j, -1));
  if (j < grid.heightsKpc.length - 1) faces.push(verticalFace(grid, i, j, 1));
  if (grid.kind === 'slab') return faces;
  if (i > 0) faces.push(radialFace(grid, i, j, -1));
  if (i < grid.radiiKpc.length - 1) faces.push(radialFace(grid, i, j, 1));
  return faces;
}

/** (1/r) d(rA)/dr and dA/dz of the potential at a node, second order on uneven nodes; none along r in a slab. */
export function potentialGradient(grid: MeridionalGrid, i: number, j: number): { readonly radial: readonly Weight[]; readonly vertical: readonly Weight[] } {
  const faces = facesOf(grid, i, j);
  const isBottom = j === 0;
  const isTop = j === grid.heightsKpc.length - 1;
  const isFlat = (isBottom && grid.bottom.potential === 'mirror') || (isTop && grid.top.potential === 'mirror');
  return {
    radial: meanSlope(faces.filter((face) => face.isRadial)),
    vertical: isFlat ? [] : meanSlope(faces.filter((face) => !face.isRadial)),
  };
}

/** The slope between two faces, the nearer one counting more; of one face alone, its own. */
function meanSlope(faces: readonly Face[]): readonly Weight[] {
  if (faces.length < 2) return faces.flatMap(({ slope }) => slope);
  const total = faces[0].span + faces[1].span;
  return faces.flatMap(({ slope }, k) => slope.map(({ node, weight }) => ({ node, weight: (weight * faces[1 - k].span) / total })));
}

function verticalFace({ radiiKpc, heightsKpc: z }: MeridionalGrid, i: number, j: number, up: 1 | -1): Face {
  const nr = radiiKpc.length;
  const [low, high] = up > 0 ? [j, j + 1] : [j - 1, j];
  const span = z[high] - z[low];
  const isEnd = j === 0 || j === z.length - 1;
  return {
    isRadial: false,
    neighbour: i + (j + up) * nr,
    outward: up,
    slope: [{ node: i + high * nr, weight: 1 / span }, { node: i + low * nr, weight: -1 / span }],
    span,
    width: isEnd ? span / 2 : (z[j + 1] - z[j - 1]) / 2,
    radiusKpc: radiiKpc[i],
    heightKpc: (z[low] + z[high]) / 2,
  };
}

function radialFace({ radiiKpc: r, heightsKpc }: MeridionalGrid, i: number, j: number, out: 1 | -1): Face {
  const [low, high] = out > 0 ? [i, i + 1] : [i - 1, i];
  const row = j * r.length;
  const span = r[high] - r[low];
  const middle = (r[low] + r[high]) / 2;
  return {
    isRadial: true,
    neighbour: i + out + row,
    outward: out,
    slope: [{ node: high + row, weight: r[high] / (middle * span) }, { node: low + row, weight: -r[low] / (middle * span) }],
    span,
    width: (r[Math.min(i + 1, r.length - 1)] - r[Math.max(i - 1, 0)]) / 2,
    radiusKpc: middle,
    heightKpc: heightsKpc[j],
  };
}
