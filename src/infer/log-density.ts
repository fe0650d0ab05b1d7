/**
 * All that a sampler knows of a problem: the ln of a density at many points at once, up to a
 * constant; -Infinity where there is none. Must give the same for the same points, and stop when
 * `signal` does.
 */
export type LogDensities = (points: readonly Float64Array[], signal?: AbortSignal) => Promise<ArrayLike<number>>;

/** Evaluates and refuses what no sampler can go on from: NaN, infinity, a wrong count. */
export async function evaluateDensities(density: LogDensities, points: readonly Float64Array[], signal?: AbortSignal): Promise<ArrayLike<number>> {
  signal?.throwIfAborted();
  if (points.length === 0) return [];
  const values = await density(points, signal);
  if (values.length !== points.length) throw new Error(`The density gave ${values.length} values for ${points.length} points.`);
  for (let k = 0; k < values.length; k++) {
    if (Number.isNaN(values[k]) || values[k] === Infinity) {
      throw new Error(`The density is ${values[k]} at (${[...points[k]].join(', ')}): nothing can be sampled.`);
    }
  }
  return values;
}
