/**
 * The power spectrum of a random field: power per mode falls as k^-slope between the outer scale
 * and wavelengths of zero, in the range that a box and a grid hold. Wavenumbers count waves in the box.
 */
export interface TurbulenceSpectrum {
  /** Of the three-dimensional power: 11/3 for Kolmogorov turbulence, E(k) ∝ k^(2 - slope). Above 3. */
  readonly slope: number;
  /** Box over outer scale. */
  readonly first: number;
  /** Box over the shortest wavelength that is resolved. */
  readonly last: number;
  /** rms along z over that along x or y. */
  readonly verticalRatio: number;
}

/** Cells of the grid in the shortest wave that it carries: beyond, splines would carry the wave's images too. */
export const cellsPerWave = 3;

/** Least and largest rms along z over that across it that a divergence-free field can have here: see `verticalWeight`. */
export const verticalRatios = [0.48, 2.8] as const;

/** Share of the variance at wavelengths shorter than those resolved: (first/last)^(slope - 3). */
export function unresolvedShare({ slope, first, last }: Pick<TurbulenceSpectrum, 'slope' | 'first' | 'last'>): number {
  return Math.pow(first / last, slope - 3);
}

/**
 * Correlation length of B along a line of sight that runs along B, both senses together, over the
 * longest wavelength L of a spectrum that reaches to wavelength zero: a solenoidal isotropic field
 * has 3/2 of the length of its trace, (L/2) (a - 1)/a with a = slope - 2 (0.3 L for Kolmogorov's 11/3).
 * Monin & Yaglom 1975, section 12; Harari et al. 2002, JHEP 03 045.
 */
export function correlationShare(slope: number): number {
  const a = slope - 2;
  return (3 / 4) * ((a - 1) / a);
}

/**
 * Weight of the z component before projection that gives the wanted ratio of rms behind it. White
 * noise (1, 1, w) projected across k and averaged over directions has the variances (9 + w²)/15
 * along x and y and (2 + 8 w²)/15 along z (own derivation), so that ratios between √(2/9) and √8 can be had.
 */
export function verticalWeight(ratio: number): number {
  const square = ratio * ratio;
  return Math.sqrt(Math.max(0, (9 * square - 2) / (8 - square)));
}

/** rms of the mean component where that along x is 1: √((2 + ratio²)/3). */
export function meanComponent(verticalRatio: number): number {
  return Math.sqrt((2 + verticalRatio * verticalRatio) / 3);
}

/** One wave vector of the half of all that is not the mirror image of the other half. */
export type TakeMode = (kx: number, ky: number, kz: number, square: number) => void;

/**
 * Calls `begin` for every column (kx, ky) and `take` for every mode of a column with
 * first ≤ |k| ≤ last, kz = 0, 1, -1, 2, …: what a larger `last` adds comes after the rest of its column.
 */
export function eachMode({ first, last }: Pick<TurbulenceSpectrum, 'first' | 'last'>, begin: (kx: number, ky: number) => void, take: TakeMode): void {
  const reach = Math.floor(last);
  for (let kx = 0; kx <= reach; kx++) {
    for (let ky = kx === 0 ? 0 : -reach; ky <= reach; ky++) {
      const across = kx * kx + ky * ky;
      if (across > last * last) continue;
      begin(kx, ky);
      const most = Math.floor(Math.sqrt(last * last - across));
      for (let size = 0; size <= most; size++) {
        const square = across + size * size;
        if (square < first * first || square === 0 || square > last * last) continue;
        take(kx, ky, size, square);
        // Of the column kx = ky = 0 the lower half mirrors the upper.
        if (size > 0 && (kx > 0 || ky > 0)) take(kx, ky, -size, square);
      }
    }
  }
}
