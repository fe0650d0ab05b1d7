/** What one ray brings, per frequency, in units of C B^q kpc before the spectral factor. */
export interface RaySums {
  readonly total: Float64Array;
  readonly cosine: Float64Array;
  readonly sine: Float64Array;
  readonly heightCosine: Float64Array;
  readonly heightSine: Float64Array;
  readonly emitted: Float64Array;
  /** Estimated error over its scale, per frequency tested. */
  readonly error: Float64Array;
  faradayDepth: number;
  samples: number;
}

/** A new, empty set of sums for `count` frequencies. */
export function makeRaySums(count: number): RaySums {
  const array = (): Float64Array => new Float64Array(count);
  return {
    total: array(),
    cosine: array(),
    sine: array(),
    heightCosine: array(),
    heightSine: array(),
    emitted: array(),
    error: array(),
    faradayDepth: 0,
    samples: 0,
  };
}

/** Sets all sums to zero. */
export function clearSums(sums: RaySums): void {
  for (const array of [sums.total, sums.cosine, sums.sine, sums.heightCosine, sums.heightSine, sums.emitted, sums.error]) array.fill(0);
  sums.faradayDepth = 0;
  sums.samples = 0;
}
