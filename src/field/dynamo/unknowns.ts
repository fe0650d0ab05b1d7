import type { EndConditions, MeridionalGrid } from './grid.ts';

/** Where the values of a field stand in a vector; nodes that are held at zero have no place in it. */
export interface Unknowns {
  readonly count: number;
  /** Place of the potential (uG kpc) at node i + j · radii, or -1. */
  readonly potential: Int32Array;
  /** Place of the azimuthal field (uG), or -1. */
  readonly azimuthal: Int32Array;
}

/** Potential A_phi (uG kpc) and azimuthal field (uG) at every node, [i + j · radii]. */
export interface NodeField {
  readonly potential: Float64Array;
  readonly azimuthal: Float64Array;
}

/** Numbers the unknowns of a grid, along its shorter side first: the band of its matrices is then narrowest. */
export function numberUnknowns(grid: MeridionalGrid): Unknowns {
  const [nr, nz] = [grid.radiiKpc.length, grid.heightsKpc.length];
  const potential = new Int32Array(nr * nz).fill(-1);
  const azimuthal = new Int32Array(nr * nz).fill(-1);
  const isFree = (variable: keyof EndConditions, i: number, j: number): boolean => {
    if (grid.kind === 'disc' && (i === 0 || i === nr - 1)) return false;
    if (j === 0) return grid.bottom[variable] === 'mirror';
    return j < nz - 1 || grid.top[variable] === 'mirror';
  };
  let count = 0;
  const radialFirst = nr <= nz;
  const [outer, inner] = radialFirst ? [nz, nr] : [nr, nz];
  for (let a = 0; a < outer; a++) {
    for (let b = 0; b < inner; b++) {
      const [i, j] = radialFirst ? [b, a] : [a, b];
      if (isFree('potential', i, j)) potential[i + j * nr] = count++;
      if (isFree('azimuthal', i, j)) azimuthal[i + j * nr] = count++;
    }
  }
  return { count, potential, azimuthal };
}

/** A vector of unknowns as values at every node. */
export function nodeField({ potential, azimuthal }: Unknowns, x: Float64Array): NodeField {
  const spread = (places: Int32Array): Float64Array => Float64Array.from(places, (place) => (place < 0 ? 0 : x[place]));
  return { potential: spread(potential), azimuthal: spread(azimuthal) };
}

/** The vector of a field given at every node; values at nodes held at zero are dropped. */
export function unknownsOf({ count, potential, azimuthal }: Unknowns, field: NodeField): Float64Array {
  const x = new Float64Array(count);
  potential.forEach((place, node) => {
    if (place >= 0) x[place] = field.potential[node];
  });
  azimuthal.forEach((place, node) => {
    if (place >= 0) x[place] = field.azimuthal[node];
  });
  return x;
}
