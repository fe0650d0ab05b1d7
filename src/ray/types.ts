/** Rays to follow: offsets on the sky, kpc, north and east of the galaxy's centre. */
export interface RayBundle {
  readonly northKpc: Float64Array;
  readonly eastKpc: Float64Array;
}

/**
 * What the rays of a bundle bring, before foreground, beam and noise. Arrays over frequencies are
 * indexed [frequency * rays + ray]. Brightness in Jy/sr, IAU signs (north through east).
 */
export interface RayResult {
  readonly I: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
  /**
   * integral z (Q+iU) along the ray, Jy/sr kpc, real and imaginary part: for origin heights. One
   * plane for each point of the spectrum whose heights were wanted, in the order of the wish.
   */
  readonly heightQ: Float64Array;
  readonly heightU: Float64Array;
  /** integral |j_P| ds without rotation, Jy/sr: tells where |P| is too small to have an origin. */
  readonly emittedP: Float64Array;
  /** Total Faraday depth per ray, rad m^-2, without foreground. */
  readonly faradayDepth: Float64Array;
  /** Largest estimated error per frequency, on the scale that `tolerance` bounds. */
  readonly error: Float64Array;
  /** Samples taken, summed over the rays. */
  readonly samples: number;
  /** Derivatives by the parameters that a job names; absent where it names none. */
  readonly tangents?: RayTangents;
}

/**
 * Derivatives of a bundle's results by parameters of the scene, per unit that their path has inside
 * (rad for angles): of I, Q and U at [(parameter * frequencies + frequency) * rays + ray], of the
 * total Faraday depth at [parameter * rays + ray].
 */
export interface RayTangents {
  readonly I: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
  readonly faradayDepth: Float64Array;
}
