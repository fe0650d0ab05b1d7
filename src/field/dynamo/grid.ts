/** Which value a variable takes at an end of the heights: nothing, or the same on both sides (no slope). */
export type EndCondition = 'zero' | 'mirror';

/** Conditions on the potential and on the azimuthal field at one end of the heights. */
export interface EndConditions {
  readonly potential: EndCondition;
  readonly azimuthal: EndCondition;
}

/**
 * Nodes in the meridional plane. A disc's radii run from the axis to far outside, where field and
 * potential vanish; a slab is one column without radial terms, at its only radius.
 */
export interface MeridionalGrid {
  readonly kind: 'disc' | 'slab';
  readonly radiiKpc: Float64Array;
  readonly heightsKpc: Float64Array;
  readonly bottom: EndConditions;
  readonly top: EndConditions;
  /** Nodes 0 … insideRadial and ± insideVertical about z = 0 lie evenly in the volume asked for. */
  readonly insideRadial: number;
  readonly insideVertical: number;
}

/** Symmetry of the whole field about the plane; `mixed`: none, the grid has both halves. */
export type Parity = 'even' | 'odd' | 'mixed';

/** The volume that is wanted, how finely it is divided, and how far out the field is followed. */
export interface DiscGridOptions {
  readonly radiusKpc: number;
  readonly heightKpc: number;
  /** Cells over the radius, and over the height of one half. */
  readonly radialCells: number;
  readonly verticalCells: number;
  /** The outer boundary lies this many radii beyond the volume. */
  readonly reach: number;
}

/** Cells beyond the volume for each within it: they grow outward. */
const outerShare = 0.4;

/**
 * Conditions at z = 0 for a parity. Even (quadrupolar): B_r and B_phi the same on both sides, so that
 * A_phi is odd in z; odd (dipolar): the reverse (physics.md section 4).
 */
export function planeConditions(parity: 'even' | 'odd'): EndConditions {
  return parity === 'even' ? { potential: 'zero', azimuthal: 'mirror' } : { potential: 'mirror', azimuthal: 'zero' };
}

const nothing: EndConditions = { potential: 'zero', azimuthal: 'zero' };

/** The grid of a disc with its halo; of a pure parity only the upper half. `plane` overrides what holds at z = 0. */
export function discGrid(options: DiscGridOptions, parity: Parity, plane?: EndConditions): MeridionalGrid {
  const { radiusKpc, heightKpc, radialCells, verticalCells, reach } = options;
  const upper = stretchedNodes(heightKpc, verticalCells, reach * radiusKpc);
  const half = plane ?? (parity === 'mixed' ? undefined : planeConditions(parity));
  return {
    kind: 'disc',
    radiiKpc: stretchedNodes(radiusKpc, radialCells, reach * radiusKpc),
    heightsKpc: half ? upper : bothSides(upper),
    bottom: half ?? nothing,
    top: nothing,
    insideRadial: radialCells,
    insideVertical: verticalCells,
  };
}

/** The one-dimensional limit at a radius: B_r = B_phi = 0 at |z| = halfThickness. */
export function slabGrid(radiusKpc: number, halfThicknessKpc: number, cells: number, parity: Parity): MeridionalGrid {
  const upper = Float64Array.from({ length: cells + 1 }, (_, j) => (j * halfThicknessKpc) / cells);
  const surface: EndConditions = { potential: 'mirror', azimuthal: 'zero' };
  return {
    kind: 'slab',
    radiiKpc: Float64Array.of(radiusKpc),
    heightsKpc: parity === 'mixed' ? bothSides(upper) : upper,
    bottom: parity === 'mixed' ? surface : planeConditions(parity),
    top: surface,
    insideRadial: 0,
    insideVertical: cells,
  };
}

/** Even nodes from 0 to `inside`, then ever wider ones up to `beyond` past it; halving the cells halves every spacing. */
function stretchedNodes(inside: number, cells: number, beyond: number): Float64Array {
  const outer = Math.max(4, Math.round(outerShare * cells));
  const last = outer / cells;
  const growth = Math.max(0, beyond / inside - last) / last ** 3;
  return Float64Array.from({ length: cells + outer + 1 }, (_, k) => {
    const past = Math.max(0, k / cells - 1);
    return inside * (k / cells + growth * past ** 3);
  });
}

function bothSides(upper: Float64Array): Float64Array {
  const lower = Array.from(upper.subarray(1), (z) => -z).reverse();
  return Float64Array.from([...lower, ...upper]);
}
