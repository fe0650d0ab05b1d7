/**
 * Values from outside for Faraday spectra (Brentjens & de Bruyn 2005, eq. 61 to 63, and the numerical
 * width of the spread function), recomputed with numpy from the formulas: channels of equal width and
 * weight. [lowest Hz, highest Hz, channels, width at half height, pi/smallest lambda^2, sqrt 3/widest channel, mean lambda^2].
 * The mean over the top-hat of the lowest channel differs from its centre by 1e-6 or less.
 */
export const surveys = [
  { from: 1e9, to: 2e9, channels: 1024, resolution: 63.465788741804374, scale: 139.8197296845728, widest: 9881.548211581849, mean: 0.04493775268701182 },
  { from: 1.2e8, to: 1.8e8, channels: 2000, resolution: 1.1368953177046013, scale: 1.1325398104450393, widest: 555.2320739468058, mean: 4.16090355951237 },
  { from: 2e9, to: 4e9, channels: 512, resolution: 253.86322287429854, scale: 559.2789187382912, widest: 19792.018018511753, mean: 0.01123443348438809 },
  { from: 3.15e8, to: 3.78e8, channels: 126, resolution: 13.804482306885607, scale: 4.9945005640626245, widest: 603.7872820942848, mean: 0.7548120447954004 },
] as const;

/** 200 samples evenly from 0.02 to 0.09 m^2, at 30 rad m^-2: sin(N phi d)/(N sin(phi d)). */
export const dirichlet = { first: 0.02, last: 0.09, count: 200, depth: 30, value: 0.4064574062498228 } as const;

/** Two thin screens at 1 to 2 GHz, 1024 channels: |F| at both depths and the angle 2 chi at the reference wavelength of the first. */
export const twoScreens = {
  screens: [
    { depth: 150, P: 1, chi0: 0.3 },
    { depth: -60, P: 0.7, chi0: 1 },
  ],
  spectrum: [0.918652160765427, 0.5838042157735959],
} as const;

/** <P^2> of a peak in excess, sigma^2, from 80000 draws at P = 8 sigma (derived; printed as 2.3 by George, Stil & Keller 2012). */
export const peakBias = 1.881;
