/**
 * Values from outside for maps and what is measured in them. Each number was recomputed with numpy,
 * scipy or sympy from the published formula named beside it (formulas quoted from memory).
 */

/** Calabretta & Greisen 2002; CRVAL (150, 40) deg, CRPIX 65, CDELT -+10 arcsec, pixel (565, 365). */
export const wcsPoints = {
  TAN: { raDeg: 148.1651613955688, decDeg: 40.81873803287211 },
  SIN: { raDeg: 148.1644192403427, decDeg: 40.81905935326556 },
} as const;

/** Solid angle of a Gaussian beam over the product of its FWHM: pi/(4 ln 2). */
export const beamFactor = 1.13309004;

/**
 * True P/sigma, the mean of the observed P/sigma (Rice 1945), and the mean of
 * sqrt(max(P^2 - sigma^2, 0))/sigma (Wardle & Kronberg 1974), both by scipy quadrature of Rice's law.
 */
export const riceRows = [
  [0, 1.2533141373155, 0.7601734505331],
  [0.5, 1.3304473406107, 0.8537309535012],
  [1, 1.5485724605511, 1.1177992271266],
  [2, 2.2723834280687, 1.9764353107193],
  [3, 3.1725772879007, 2.9839452569811],
  [4, 4.1271935425367, 3.9943153739161],
  [5, 5.1010696394921, 4.9975499494624],
  [8, 8.0627501660829, 7.9994778380742],
] as const;

/** Observed P/sigma and its debiased value (Wardle & Kronberg 1974). */
export const debiasedRows = [
  [3, 2.8284271247461903],
  [5, 4.898979485566356],
  [8, 7.937253933193772],
] as const;

/** 100 channels uniform in lambda^2 from 0.02 to 0.09 m^2, P = 1, sigma = 0.3 (Brentjens & de Bruyn 2005, eq. 52, 53). */
export const rmErrors = { rm: 0.7349211610452592, chi0: 0.04311415158251566 };

/** RM, channel, |P| after a top-hat channel in frequency (Burn 1966; numerical mean). */
export const bandwidthRows = [
  { depth: 500, frequencyHz: 1.4e9, widthHz: 8e6, P: 0.9885958515317217 },
  { depth: 2000, frequencyHz: 1.4e9, widthHz: 8e6, P: 0.8267042485027429 },
  { depth: 100, frequencyHz: 0.15e9, widthHz: 0.1e6, P: 0.9533896339105086 },
] as const;
