/**
 * Polynomials of degree 0, 1, 2 through y = [0.1, 0.9, 2.2, 2.8, 4.1, 5.2] at x = 0..5, sigma 0.2:
 * ln L at the maximum, AIC, BIC, AICc. Reference data 13.lin.d0, d1, d2, recomputed outside.
 */
export const polynomials = {
  x: [0, 1, 2, 3, 4, 5],
  y: [0.1, 0.9, 2.2, 2.8, 4.1, 5.2],
  sigma: 0.2,
  expected: [
    { logLikelihood: -225.044504, aic: 452.089007, bic: 451.880767, aicc: 453.089007 },
    { logLikelihood: 2.54299628, aic: -1.08599255, bic: -1.50247361, aicc: 2.91400745 },
    { logLikelihood: 2.8778177, aic: 0.244364592, bic: -0.380357, aicc: 12.2443646 },
  ],
} as const;

/** Kass & Raftery 1995, section 3.2, 2 ln B: reference data 13.scales. */
export const kassRaftery = [2, 6, 10] as const;
