import { naturalSpline, type SmoothCurve } from '../math/natural-spline.ts';
import { interpolateGrid, evaluateGrid, type SplineGrid } from '../math/spline-grid.ts';
import { InputError } from '../units/input-error.ts';

/** One row of an opening law: radius in the plane, kpc, and angle from the axis of the line that leaves there, rad. */
export type OpeningRow = readonly [radiusKpc: number, angle: number];

/** The radius r_0 in the plane from which the line through a point comes, over r, on a grid of Z and r. */
export interface OriginGrid {
  readonly grid: SplineGrid;
  readonly heightStepKpc: number;
  readonly radialStepKpc: number;
}

/** Most the grid's r_0 may be wrong by, as a share of the volume's radius. */
const accuracy = 1e-6;
const coarsest = { heights: 33, radii: 65 };
const doublings = 4;
const checksAlong = 48;

/**
 * T(r_0), the tangent of the opening angle, through the rows: a cubic spline, odd in r_0 (lines on the
 * axis stay there), twice continuously differentiable, without curvature at the last row. Throws InputError where rows do
 * not ascend, do not reach the volume's radius, or the law between them turns inward or makes lines cross
 * below the volume's height: they do where 1 + Z T' ≤ 0 (physics.md section 4.4).
 */
export function openingLaw(rows: readonly OpeningRow[], { radiusKpc, heightKpc }: { readonly radiusKpc: number; readonly heightKpc: number }): SmoothCurve {
  const outer = rows[0]?.[0] === 0 ? rows.slice(1) : rows;
  if (rows[0]?.[0] === 0 && rows[0][1] !== 0) throw new InputError('the line on the axis stays on it: the angle at 0 kpc is 0 deg');
  if (outer.length < 2) throw new InputError('an opening law needs at least two rows beside that on the axis');
  const wrong = rows.findIndex(([radius], k) => k > 0 && radius <= rows[k - 1][0]);
  if (wrong > 0) throw new InputError(`radii must grow from row to row, but ${rows[wrong][0]} kpc follows ${rows[wrong - 1][0]} kpc`);
  const last = outer[outer.length - 1][0];
  if (last < radiusKpc * (1 - 1e-9)) throw new InputError(`the opening law ends at ${last} kpc, within the volume's radius of ${radiusKpc} kpc: give rows up to there`);
  const radii = outer.map(([radius]) => radius);
  const tangents = outer.map(([, angle]) => Math.tan(angle));
  const law = naturalSpline([...radii.map((r) => -r).reverse(), 0, ...radii], [...tangents.map((t) => -t).reverse(), 0, ...tangents]);
  const pieces = [0, ...radii.slice(0, -1)].map((from, k) => pieceOf(law, from, radii[k]));
  const fall = pieces.reduce((worst, piece) => (piece.fall.slope < worst.fall.slope ? piece : worst)).fall;
  if (fall.slope * heightKpc <= -1) {
    throw new InputError(
      `lines that leave the plane near ${fall.radiusKpc.toPrecision(3)} kpc cross at a height of ${(-1 / fall.slope).toPrecision(3)} kpc, within the volume's ${heightKpc} kpc: ` +
        'there the angle falls too fast with radius; let it fall more slowly, or make the volume lower',
    );
  }
  const inward = pieces.flatMap(({ turns }) => turns).find((radius) => law.value(radius) < 0);
  if (inward !== undefined) throw new InputError(`the smooth law through the rows turns inward, to below 0 deg near ${inward.toPrecision(3)} kpc: give more rows there`);
  return law;
}

interface LawPiece {
  /** Where T' is least. */
  readonly fall: { readonly radiusKpc: number; readonly slope: number };
  /** Radii between the rows where T' = 0. */
  readonly turns: readonly number[];
}

function pieceOf(law: SmoothCurve, from: number, to: number): LawPiece {
  const width = to - from;
  const [left, right, mean] = [law.slope(from), law.slope(to), (law.value(to) - law.value(from)) / width];
  // T' = left + linear t + square t² on t in [0, 1].
  const [linear, square] = [6 * mean - 4 * left - 2 * right, 3 * (left + right) - 6 * mean];
  const slope = (t: number): number => left + t * (linear + t * square);
  const inside = (roots: readonly number[]): readonly number[] => roots.filter((t) => t > 0 && t < 1);
  const least = [0, 1, ...inside([-linear / (2 * square)])].reduce((best, t) => (slope(t) < slope(best) ? t : best));
  const root = Math.sqrt(linear * linear - 4 * square * left);
  const turns = inside(square === 0 ? [-left / linear] : [(-linear - root) / (2 * square), (-linear + root) / (2 * square)]);
  return { fall: { radiusKpc: from + least * width, slope: slope(least) }, turns: turns.map((t) => from + t * width) };
}

/**
 * The r_0 of r = r_0 + Z T(r_0), by bisection with Newton steps: the left side rises, from 0 at 0 to more than r at r. All kpc.
 */
export function originRadius(law: SmoothCurve, heightKpc: number, radiusKpc: number): number {
  let [low, high] = [0, radiusKpc];
  let at = radiusKpc / (1 + heightKpc * law.slope(0));
  for (let k = 0; k < 100 && high - low > 1e-15 * radiusKpc; k++) {
    if (!(at > low && at < high)) at = (low + high) / 2;
    const excess = at + heightKpc * law.value(at) - radiusKpc;
    if (excess > 0) high = at;
    else low = at;
    const step = excess / (1 + heightKpc * law.slope(at));
    at -= step;
    if (Math.abs(step) <= 1e-15 * radiusKpc) break;
  }
  return Math.max(0, Math.min(radiusKpc, at));
}

/**
 * r_0/r on a grid of Z (0 to the volume's height) and r (0 to its radius, even), refined until r_0 between the samples is right to a
 * millionth of the volume's radius; cubic splines, so that what is made of it is smooth and a curl of it
 * divergence-free. Throws InputError where no grid is fine enough.
 */
export function originGrid(rows: readonly OpeningRow[], volume: { readonly radiusKpc: number; readonly heightKpc: number }): OriginGrid {
  const law = openingLaw(rows, volume);
  const { radiusKpc, heightKpc } = volume;
  const share = (Z: number, r: number): number => (r === 0 ? 1 / (1 + Z * law.slope(0)) : originRadius(law, Z, r) / r);
  for (let doubling = 0; doubling <= doublings; doubling++) {
    const [heights, radii] = [coarsest.heights, coarsest.radii].map((points) => (points - 1) * 2 ** doubling + 1);
    const [heightStepKpc, radialStepKpc] = [heightKpc / (heights - 1), radiusKpc / (radii - 1)];
    const values = Float64Array.from({ length: heights * radii }, (_, k) => share(Math.floor(k / radii) * heightStepKpc, (k % radii) * radialStepKpc));
    const grid = interpolateGrid(`opening/${radiusKpc}/${heightKpc}/${JSON.stringify(rows)}`, values, [heights, radii], ['free', 'even']);
    if (worstError(grid, law, { heights, radii, heightStepKpc, radialStepKpc }) <= accuracy * radiusKpc) return { grid, heightStepKpc, radialStepKpc };
  }
  throw new InputError('lines of this opening law come too close to crossing for a grid to follow them: let the angle change more slowly with radius, or make the volume lower');
}

/** Largest error of r_0, kpc, in the middles of cells spread over the grid. */
function worstError(
  grid: SplineGrid,
  law: SmoothCurve,
  { heights, radii, heightStepKpc, radialStepKpc }: { readonly heights: number; readonly radii: number; readonly heightStepKpc: number; readonly radialStepKpc: number },
): number {
  let worst = 0;
  const middle = (k: number, points: number): number => Math.floor((k * (points - 1)) / checksAlong) + 0.5;
  for (let i = 0; i < checksAlong; i++) {
    for (let j = 0; j < checksAlong; j++) {
      const [u, v] = [Math.min(middle(i, heights), heights - 1.5), middle(j, radii)];
      const r = v * radialStepKpc;
      worst = Math.max(worst, Math.abs(evaluateGrid(grid, [0, 0], u, v) * r - originRadius(law, u * heightStepKpc, r)));
    }
  }
  return worst;
}
