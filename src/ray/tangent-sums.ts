/**
 * Derivatives that one ray brings, in the units of `RaySums` over the unit of the parameter: of I, Q
 * and U at [parameter * frequencies + frequency], of the whole Faraday depth at [parameter].
 */
export interface TangentSums {
  readonly total: Float64Array;
  readonly cosine: Float64Array;
  readonly sine: Float64Array;
  readonly faradayDepth: Float64Array;
}

/** A new, empty set of derivatives. */
export function makeTangentSums(frequencies: number, parameters: number): TangentSums {
  const array = (): Float64Array => new Float64Array(frequencies * parameters);
  return { total: array(), cosine: array(), sine: array(), faradayDepth: new Float64Array(parameters) };
}
