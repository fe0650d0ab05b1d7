/** Share of the variance of an outcome that one input explains. */
export interface SensitivityIndex {
  /** By itself: the variance of the conditional mean. */
  readonly first: number;
  readonly firstError: number;
  /** With all its joint effects: what would be left were all others known. */
  readonly total: number;
  readonly totalError: number;
}

/** Blocks of base samples whose scatter gives the errors. */
const blocks = 32;

interface Sums {
  count: number;
  sum: number;
  squares: number;
  /** Per input: sum of f(B) (f(AB_i) - f(A)), and of (f(A) - f(AB_i))^2. */
  readonly firsts: Float64Array;
  readonly totals: Float64Array;
}

/**
 * First-order and total Sobol indices, gathered sample by sample so that memory does not grow. Each
 * base sample brings f(A), f(B) and f(AB_i) for every input i, where AB_i is A with its input i taken
 * from B. First order: mean of f(B)(f(AB_i) - f(A)) over the variance; total: half the mean of
 * (f(A) - f(AB_i))^2 (Saltelli et al. 2010, table 2, estimators b and f, the latter Jansen 1999). Outcomes
 * are centred on the first sample's mean, which leaves both as they are and saves digits. Errors:
 * jackknife over 32 blocks of successive samples (Efron 1982), on the safe side for Sobol points.
 */
export class SensitivityTally {
  private readonly parts: readonly Sums[];
  private seen = 0;
  private offset = NaN;

  /** `samples`: how many base samples will come in all, so that blocks are equal. */
  constructor(private readonly inputs: number, private readonly samples: number) {
    const count = Math.max(1, Math.min(blocks, Math.floor(samples / 2)));
    this.parts = Array.from({ length: count }, () => ({ count: 0, sum: 0, squares: 0, firsts: new Float64Array(inputs), totals: new Float64Array(inputs) }));
  }

  /** The outcomes of one base sample, [f(A), f(B), f(AB_1) … f(AB_d)]; a sample with a blank is left out. */
  add(outcomes: ArrayLike<number>): void {
    const block = Math.min(this.parts.length - 1, Math.floor((this.seen++ * this.parts.length) / this.samples));
    for (let k = 0; k < this.inputs + 2; k++) if (!Number.isFinite(outcomes[k])) return;
    if (Number.isNaN(this.offset)) this.offset = (outcomes[0] + outcomes[1]) / 2;
    const part = this.parts[block];
    const [a, b] = [outcomes[0] - this.offset, outcomes[1] - this.offset];
    part.count++;
    part.sum += a + b;
    part.squares += a * a + b * b;
    for (let i = 0; i < this.inputs; i++) {
      const mixed = outcomes[i + 2] - this.offset;
      part.firsts[i] += b * (mixed - a);
      part.totals[i] += (a - mixed) ** 2;
    }
  }

  /** Base samples without a blank so far. */
  get used(): number {
    return this.parts.reduce((sum, part) => sum + part.count, 0);
  }

  /** One index per input; NaN where nothing varies or too little is known. */
  indices(): SensitivityIndex[] {
    const whole = indicesOf(this.parts, this.inputs);
    const filled = this.parts.filter((part) => part.count > 0);
    const without = filled.map((left) => indicesOf(filled.filter((part) => part !== left), this.inputs));
    const error = (pick: (index: { first: number; total: number }) => number, i: number): number => {
      const values = without.map((indices) => pick(indices[i]));
      const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
      const squares = values.reduce((sum, value) => sum + (value - mean) ** 2, 0);
      return values.length > 1 ? Math.sqrt(((values.length - 1) / values.length) * squares) : NaN;
    };
    return whole.map(({ first, total }, i) => ({ first, total, firstError: error((one) => one.first, i), totalError: error((one) => one.total, i) }));
  }
}

function indicesOf(parts: readonly Sums[], inputs: number): { readonly first: number; readonly total: number }[] {
  const add = (pick: (part: Sums) => number): number => parts.reduce((sum, part) => sum + pick(part), 0);
  const count = add((part) => part.count);
  const mean = add((part) => part.sum) / (2 * count);
  const variance = add((part) => part.squares) / (2 * count) - mean * mean;
  return Array.from({ length: inputs }, (_, i) => ({
    first: variance > 0 ? add((part) => part.firsts[i]) / count / variance : NaN,
    total: variance > 0 ? add((part) => part.totals[i]) / (2 * count) / variance : NaN,
  }));
}

/**
 * The same indices of a full grid, every point of which is known: values[index], the last axis running
 * fastest. Exact for the grid, so without errors (0). NaN where a value is blank or nothing varies.
 */
export function gridSensitivity(values: ArrayLike<number>, steps: readonly number[]): SensitivityIndex[] {
  const count = steps.reduce((product, step) => product * step, 1);
  const mean = meanOver(count, (k) => values[k]);
  const variance = meanOver(count, (k) => (values[k] - mean) ** 2);
  return steps.map((step, axis) => {
    const stride = steps.slice(axis + 1).reduce((product, one) => product * one, 1);
    const levels = new Float64Array(step);
    const rest = new Float64Array(count / step);
    for (let k = 0; k < count; k++) {
      const level = Math.floor(k / stride) % step;
      const other = Math.floor(k / (stride * step)) * stride + (k % stride);
      levels[level] += (values[k] * step) / count;
      rest[other] += values[k] / step;
    }
    const explained = meanOver(step, (k) => (levels[k] - mean) ** 2);
    const without = meanOver(rest.length, (k) => (rest[k] - mean) ** 2);
    if (!(variance > 0)) return { first: NaN, firstError: NaN, total: NaN, totalError: NaN };
    return { first: explained / variance, firstError: 0, total: 1 - without / variance, totalError: 0 };
  });
}

function meanOver(count: number, value: (k: number) => number): number {
  let sum = 0;
  for (let k = 0; k < count; k++) sum += value(k);
  return sum / count;
}
