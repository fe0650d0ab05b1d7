import { sparseFromEntries, type SparseMatrix } from '../../math/sparse.ts';
import type { MeridionalGrid } from './grid.ts';
import type { DynamoProfiles, Profile } from './profiles.ts';
import { facesOf, potentialGradient } from './stencils.ts';
import { numberUnknowns, type Unknowns } from './unknowns.ts';

/** Matrix entries in proportion to alpha: coefficient · (alpha[first] + alpha[second])/2, alpha at nodes. */
export interface AlphaTerms {
  readonly rows: Int32Array;
  readonly columns: Int32Array;
  readonly coefficients: Float64Array;
  readonly first: Int32Array;
  readonly second: Int32Array;
}

/**
 * The mean-field equation on a grid, d(A_phi, B_phi)/dt = motion·(A_phi, B_phi) + alpha terms, time in
 * kpc s/km. `motion` holds rotation, wind and diffusion; alpha stands apart since the field quenches it.
 */
export interface DynamoOperator {
  readonly grid: MeridionalGrid;
  readonly unknowns: Unknowns;
  readonly motion: SparseMatrix;
  readonly alphaTerms: AlphaTerms;
  /** Unquenched alpha at the nodes, km/s, and the field that halves it, uG. */
  readonly alpha: Float64Array;
  readonly equipartition: Float64Array;
  /** Numbers at the nodes that scales are made of: shear |r grad Omega| and the least diffusivity. */
  readonly shear: Float64Array;
  readonly diffusivity: Float64Array;
}

/**
 * Discretises (physics.md section 6; e.g. Krause & Rädler 1980, ch. 11), axisymmetric:
 *   dA/dt = alpha B - (u_r/r) d(rA)/dr - u_z dA/dz + eta (d/dr (1/r) d(rA)/dr + d2A/dz2)
 *   dB/dt = r B_pol·grad Omega - d(u_r B)/dr - d(u_z B)/dz + d(alpha B_r)/dz - d(alpha B_z)/dr
 *           + d/dr (eta/r) d(rB)/dr + d/dz (eta dB/dz)
 * by central differences of second order, fluxes on the faces between nodes; (1/r) d(rA)/dr is exact for
 * A ∝ r and r^3, so nothing is lost on the axis.
 */
export function discretise(grid: MeridionalGrid, profiles: DynamoProfiles): DynamoOperator {
  const unknowns = numberUnknowns(grid);
  const { radiiKpc, heightsKpc } = grid;
  const nr = radiiKpc.length;
  const count = nr * heightsKpc.length;
  const sample = (profile: Profile): Float64Array =>
    Float64Array.from({ length: count }, (_, node) => profile(radiiKpc[node % nr], heightsKpc[Math.floor(node / nr)]));
  const entries = new Entries();
  const shear = new Float64Array(count);
  for (let node = 0; node < count; node++) {
    const at = { grid, unknowns, profiles, node, i: node % nr, j: Math.floor(node / nr) };
    const slope = shearAt(at);
    shear[node] = Math.hypot(slope.radial, slope.vertical);
    if (unknowns.potential[node] >= 0) addPotentialRow(entries, at);
    if (unknowns.azimuthal[node] >= 0) addAzimuthalRow(entries, at, slope);
  }
  return {
    grid,
    unknowns,
    shear,
    motion: sparseFromEntries(unknowns.count, entries.rows, entries.columns, entries.values),
    alphaTerms: entries.alphaTerms(),
    alpha: sample(profiles.alpha),
    diffusivity: sample(profiles.diffusivity),
    equipartition: sample(profiles.equipartition),
  };
}

/** alpha terms times x, added to `sum`. */
export function addAlphaTerms({ rows, columns, coefficients, first, second }: AlphaTerms, alpha: Float64Array, x: Float64Array, sum: Float64Array): void {
  for (let k = 0; k < rows.length; k++) sum[rows[k]] += 0.5 * coefficients[k] * (alpha[first[k]] + alpha[second[k]]) * x[columns[k]];
}

/** The whole matrix for given alpha at the nodes. */
export function linearMatrix({ motion, alphaTerms, unknowns }: DynamoOperator, alpha: Float64Array): SparseMatrix {
  const { rows, columns, coefficients, first, second } = alphaTerms;
  const values = Float64Array.from(rows, (_, k) => 0.5 * coefficients[k] * (alpha[first[k]] + alpha[second[k]]));
  return withEntries(motion, unknowns.count, rows, columns, values);
}

/** A matrix with more entries added to it. */
export function withEntries(matrix: SparseMatrix, size: number, rows: Int32Array, columns: Int32Array, values: Float64Array): SparseMatrix {
  const own = matrix.values.length;
  const allRows = new Int32Array(own + rows.length);
  for (let i = 0; i < matrix.size; i++) allRows.fill(i, matrix.rowStart[i], matrix.rowStart[i + 1]);
  allRows.set(rows, own);
  const allColumns = new Int32Array(own + rows.length);
  allColumns.set(matrix.columns);
  allColumns.set(columns, own);
  const allValues = new Float64Array(own + rows.length);
  allValues.set(matrix.values);
  allValues.set(values, own);
  return sparseFromEntries(size, allRows, allColumns, allValues);
}

interface NodePlace {
  readonly grid: MeridionalGrid;
  readonly unknowns: Unknowns;
  readonly profiles: DynamoProfiles;
  readonly node: number;
  readonly i: number;
  readonly j: number;
}

function addPotentialRow(entries: Entries, { grid, unknowns, profiles, node, i, j }: NodePlace): void {
  const place = unknowns.potential;
  const row = place[node];
  const [r, z] = [grid.radiiKpc[i], grid.heightsKpc[j]];
  const eta = profiles.diffusivity(r, z);
  for (const { slope, outward, width } of facesOf(grid, i, j)) {
    for (const { node: at, weight } of slope) entries.add(row, place[at], (eta * outward * weight) / width);
  }
  const { radial, vertical } = potentialGradient(grid, i, j);
  for (const { node: at, weight } of radial) entries.add(row, place[at], -profiles.windRadial(r, z) * weight);
  for (const { node: at, weight } of vertical) entries.add(row, place[at], -profiles.windVertical(r, z) * weight);
  entries.addAlpha(row, unknowns.azimuthal[node], 1, node, node);
}

function addAzimuthalRow(entries: Entries, { grid, unknowns, profiles, node, i, j }: NodePlace, shear: Shear): void {
  const { potential, azimuthal } = unknowns;
  const row = azimuthal[node];
  for (const { slope, outward, width, neighbour, isRadial, radiusKpc, heightKpc } of facesOf(grid, i, j)) {
    const eta = profiles.diffusivity(radiusKpc, heightKpc);
    const wind = (isRadial ? profiles.windRadial : profiles.windVertical)(radiusKpc, heightKpc);
    for (const { node: at, weight } of slope) {
      entries.add(row, azimuthal[at], (eta * outward * weight) / width);
      // alpha acts on the poloidal field of the face: B_r = -dA/dz, B_z = (1/r) d(rA)/dr.
      entries.addAlpha(row, potential[at], (-outward * weight) / width, node, neighbour);
    }
    for (const at of [node, neighbour]) entries.add(row, azimuthal[at], (-outward * wind) / (2 * width));
  }
  const { radial, vertical } = potentialGradient(grid, i, j);
  for (const { node: at, weight } of vertical) entries.add(row, potential[at], -shear.radial * weight);
  for (const { node: at, weight } of radial) entries.add(row, potential[at], shear.vertical * weight);
}

/** r dOmega/dr and r dOmega/dz, km/s/kpc. */
interface Shear {
  readonly radial: number;
  readonly vertical: number;
}

/** The shear at a node by central differences over a small fraction of the spacing. */
function shearAt({ grid: { radiiKpc, heightsKpc, kind }, profiles: { angularSpeed }, i, j }: NodePlace): Shear {
  const [r, z] = [radiiKpc[i], heightsKpc[j]];
  if (r === 0) return { radial: 0, vertical: 0 };
  const step = 1e-3 * Math.min(r, Math.abs(heightsKpc[1] - heightsKpc[0]));
  const slope = (dr: number, dz: number): number => (r * (angularSpeed(r + dr, z + dz) - angularSpeed(r - dr, z - dz))) / (2 * step);
  return { radial: slope(step, 0), vertical: kind === 'disc' ? slope(0, step) : 0 };
}

/** Matrix entries as they come; those of nodes without a place are zero and left out. */
class Entries {
  readonly rows: number[] = [];
  readonly columns: number[] = [];
  readonly values: number[] = [];
  private readonly alpha = { rows: [] as number[], columns: [] as number[], coefficients: [] as number[], first: [] as number[], second: [] as number[] };

  add(row: number, column: number, value: number): void {
    if (column < 0 || value === 0) return;
    this.rows.push(row);
    this.columns.push(column);
    this.values.push(value);
  }

  addAlpha(row: number, column: number, coefficient: number, first: number, second: number): void {
    if (column < 0) return;
    this.alpha.rows.push(row);
    this.alpha.columns.push(column);
    this.alpha.coefficients.push(coefficient);
    this.alpha.first.push(first);
    this.alpha.second.push(second);
  }

  alphaTerms(): AlphaTerms {
    const { rows, columns, coefficients, first, second } = this.alpha;
    return {
      rows: Int32Array.from(rows),
      columns: Int32Array.from(columns),
      coefficients: Float64Array.from(coefficients),
      first: Int32Array.from(first),
      second: Int32Array.from(second),
    };
  }
}
