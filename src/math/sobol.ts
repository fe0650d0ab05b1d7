import { randomStream } from './random.ts';
import { joeKuoDirections } from './sobol-directions.ts';

/** Binary digits of a coordinate; also the most points are 2^32. */
const digits = 32;

/** Direction numbers V[digit] as integers of 32 bits, of the first dimension and those of the table. */
const directions: readonly Uint32Array[] = [firstDirection(), ...joeKuoDirections.trim().split('\n').map(directionOf)];

/** Dimensions that a Sobol sequence can have here. */
export const mostSobolDimensions = directions.length;

/** A sequence of which any point can be had without those before it. */
export interface SobolSequence {
  readonly dimensions: number;
  /** Point `index` (from 0, below 2^32), coordinates in [0, 1). */
  point(index: number): Float64Array;
}

/**
 * Sobol's low-discrepancy sequence in Gray-code order (Antonov & Saleev 1979) with the direction
 * numbers of Joe & Kuo 2008. With a seed it is scrambled: a random lower-triangular matrix over the
 * digits and a random shift of them, each dimension its own (Matousek 1998), which keeps it a net and
 * makes averages unbiased. Any 2^k points from a multiple of 2^k on are a net. Throws RangeError for
 * more dimensions than `mostSobolDimensions`.
 */
export function sobolSequence(dimensions: number, seed?: number): SobolSequence {
  if (!(dimensions >= 1 && dimensions <= mostSobolDimensions)) {
    throw new RangeError(`a Sobol sequence of ${dimensions} dimensions; allowed: 1 to ${mostSobolDimensions}`);
  }
  const scrambled = Array.from({ length: dimensions }, (_, k) => (seed === undefined ? { numbers: directions[k], shift: 0 } : scramble(directions[k], seed, k)));
  return {
    dimensions,
    point: (index) => {
      // The bits in which the Gray codes up to here differ from 0.
      const gray = (index ^ (index >>> 1)) >>> 0;
      return Float64Array.from(scrambled, ({ numbers, shift }) => {
        let value = shift;
        for (let rest = gray, bit = 0; rest !== 0; rest >>>= 1, bit++) if (rest & 1) value ^= numbers[bit];
        return (value >>> 0) / 2 ** digits;
      });
    },
  };
}

/** The van der Corput sequence: m_k = 1. */
function firstDirection(): Uint32Array {
  return Uint32Array.from({ length: digits }, (_, k) => 2 ** (digits - 1 - k));
}

/** The recurrence of Bratley & Fox 1988 (their equation 2) from a line of the table. */
function directionOf(line: string): Uint32Array {
  const [a, ...m] = line.split(' ').map(Number);
  const degree = m.length;
  const numbers = new Uint32Array(digits);
  for (let k = 0; k < digits; k++) {
    if (k < degree) {
      numbers[k] = m[k] * 2 ** (digits - 1 - k);
      continue;
    }
    let value = numbers[k - degree] ^ (numbers[k - degree] >>> degree);
    for (let j = 1; j < degree; j++) if ((a >>> (degree - 1 - j)) & 1) value ^= numbers[k - j];
    numbers[k] = value;
  }
  return numbers;
}

/** Direction numbers times a random lower-triangular matrix of digits, its diagonal 1, and a random shift. */
function scramble(numbers: Uint32Array, seed: number, dimension: number): { readonly numbers: Uint32Array; readonly shift: number } {
  const random = randomStream(seed, 'sobol', dimension);
  // Row k makes digit k (from the largest) out of itself and the larger digits.
  const rows = Array.from({ length: digits }, (_, k) => {
    const own = 2 ** (digits - 1 - k);
    const larger = k === 0 ? 0 : (0xffffffff << (digits - k)) >>> 0;
    return ((Math.floor(random.uniform() * 2 ** digits) & larger) | own) >>> 0;
  });
  const turned = numbers.map((number) => rows.reduce((value, row, k) => (parity(row & number) ? value | (2 ** (digits - 1 - k)) : value) >>> 0, 0));
  return { numbers: turned, shift: Math.floor(random.uniform() * 2 ** digits) };
}

function parity(value: number): number {
  let bits = value ^ (value >>> 16);
  for (const step of [8, 4, 2, 1]) bits ^= bits >>> step;
  return bits & 1;
}
