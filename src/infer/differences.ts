/** Residuals of a model at given parameters; may run elsewhere, must stop when `signal` does. */
export type ResidualFunction = (values: Float64Array, signal?: AbortSignal) => Promise<Float64Array>;

/** How derivatives are formed from residuals. */
export interface DifferenceSteps {
  /** Step over size of a parameter; well above the model's own relative error. */
  readonly relativeStep: number;
  /** Two evaluations a parameter, error of second order in the step. */
  readonly central: boolean;
  /** Size of each parameter, where its value may be 0. */
  readonly sizes: Float64Array;
  readonly lower: Float64Array;
  readonly upper: Float64Array;
}

/**
 * Columns d residuals/d parameter by finite differences, for all parameters or those of `which`; steps
 * never leave the bounds. The shifted evaluations are started together, so that a pool of workers can
 * share them.
 */
export async function differenceColumns(
  residuals: ResidualFunction, values: Float64Array, at: Float64Array, steps: DifferenceSteps, signal?: AbortSignal,
  which: readonly number[] = [...values.keys()],
): Promise<Float64Array[]> {
  const { lower, upper } = steps;
  const shifted = (j: number, shift: number): Float64Array => {
    const copy = Float64Array.from(values);
    copy[j] += shift;
    return copy;
  };
  return Promise.all(
    which.map(async (j) => {
      const value = values[j];
      const wanted = steps.relativeStep * Math.max(Math.abs(value), steps.sizes[j]);
      const up = Math.min(wanted, upper[j] - value);
      const down = Math.min(wanted, value - lower[j]);
      if (steps.central && up === wanted && down === wanted) {
        const ahead = shifted(j, wanted);
        const behind = shifted(j, -wanted);
        const [a, b] = await Promise.all([residuals(ahead, signal), residuals(behind, signal)]);
        return a.map((r, k) => (r - b[k]) / (ahead[j] - behind[j]));
      }
      const point = shifted(j, up >= down ? up : -down);
      const width = point[j] - value;
      if (width === 0) return new Float64Array(at.length);
      const there = await residuals(point, signal);
      return there.map((r, k) => (r - at[k]) / width);
    }),
  );
}
