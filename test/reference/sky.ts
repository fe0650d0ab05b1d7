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
 * True P/sigma, its row of the check values (mean observed P/sigma, Rice 1945), and the mean of
 * sqrt(max(P^2 - sigma^2, 0))/sigma (Wardle & Kronberg 1974) by scipy quadrature of Rice's law.
 */
export const riceRows = [
  [0, '6.rice.0', 0.7601734505331],
  [0.5, '6.rice.0.5', 0.8537309535012],
  [1, '6.rice.1', 1.1177992271266],
  [2, '6.rice.2', 1.9764353107193],
  [3, '6.rice.3', 2.9839452569811],
  [4, '6.rice.4', 3.9943153739161],
  [5, '6.rice.5', 4.9975499494624],
  [8, '6.rice.8', 7.9994778380742],
] as const;

/** RM and channel of rows of the check values: |P| after a top-hat in lambda^2, and in frequency (Burn 1966). */
export const bandwidthRows = [
  { id: '5.bw.RM500.nu1.4', depth: 500, frequencyHz: 1.4e9, widthHz: 8e6 },
  { id: '5.bw.RM2000.nu1.4', depth: 2000, frequencyHz: 1.4e9, widthHz: 8e6 },
  { id: '5.bw.RM100.nu0.15', depth: 100, frequencyHz: 0.15e9, widthHz: 0.1e6 },
] as const;
