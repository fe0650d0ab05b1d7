/**
 * Values of the laws of P(lambda^2) from outside, recomputed with numpy and scipy from the published
 * formula named at each (Tribble's form as printed, the others quoted from memory).
 */
export interface LawRow {
  readonly law: string;
  /** All parameters but p = 1 and chi = 0, in order. */
  readonly values: readonly number[];
  readonly lambda2: number;
  /** |P|, and the angle of P in rad where the row states it. */
  readonly P: number;
  readonly angle?: number;
}

export const lawRows: readonly LawRow[] = [
  // Burn 1966: sinc(R l2) e^{i R l2}; chi is half the angle.
  { law: 'burn-slab', values: [50], lambda2: 0.01, P: 0.958851077208406, angle: 0.5 },
  { law: 'burn-slab', values: [50], lambda2: 0.0441, P: 0.36532598820894396, angle: 2.205 },
  { law: 'burn-slab', values: [20], lambda2: 0.0441, P: 0.8752966428, angle: 0.882 },
  { law: 'burn-slab', values: [100], lambda2: 0.0441, P: 0.2164688824 },
  // Burn 1966; Sokoloff et al. 1998: e^{-2 sigma^2 l4}.
  { law: 'external-dispersion', values: [0, 10], lambda2: 0.0441, P: 0.677760024 },
  { law: 'external-dispersion', values: [0, 20], lambda2: 0.0441, P: 0.21101037 },
  { law: 'external-dispersion', values: [0, 50], lambda2: 0.0441, P: 5.9827209e-5 },
  { law: 'external-dispersion', values: [0, 50], lambda2: 0.01, P: 0.60653066 },
  // Burn 1966; Sokoloff et al. 1998: (1 - e^{-S})/S.
  { law: 'internal-dispersion', values: [0, 20], lambda2: 0.0441, P: 0.507112282, angle: 0 },
  { law: 'internal-dispersion', values: [50, 0], lambda2: 0.0441, P: 0.365325988, angle: 2.205 },
  { law: 'internal-dispersion', values: [50, 20], lambda2: 0.0441, P: 0.231322912, angle: 2 * 0.709467153 },
  { law: 'internal-dispersion', values: [50, 20], lambda2: 0.01, P: 0.921512465, angle: 2 * 0.24661014 },
  { law: 'internal-dispersion', values: [20, 10], lambda2: 0.0441, P: 0.725953876, angle: 2 * 0.41090231 },
  // Derived (Sokoloff et al. 1998 treat it): depth, h_e/h_s.
  { law: 'exponential-disc', values: [50, 0.5], lambda2: 0.0441, P: 0.0532245048 },
  { law: 'exponential-disc', values: [50, 1], lambda2: 0.0441, P: 0.365325988 },
  { law: 'exponential-disc', values: [50, 2], lambda2: 0.0441, P: 0.655091747 },
  // Burn 1966; Horellou & Fletcher 2014: |sinc(R l2 + D)|.
  { law: 'twisted-slab', values: [20, -1.5], lambda2: 0.0441, P: 0.937550554 },
  { law: 'twisted-slab', values: [20, 0], lambda2: 0.0441, P: 0.875296643 },
  { law: 'twisted-slab', values: [20, 1.5], lambda2: 0.0441, P: 0.289095772 },
  // Tribble 1991 (form as printed): rm, sigma, s0/t.
  { law: 'tribble-screen', values: [0, 20, 0], lambda2: 0.0441, P: 0.21101037 },
  { law: 'tribble-screen', values: [0, 20, 0.5], lambda2: 0.0441, P: 0.276397604 },
  { law: 'tribble-screen', values: [0, 20, 1], lambda2: 0.0441, P: 0.402127385 },
  { law: 'tribble-screen', values: [0, 20, 3], lambda2: 0.0441, P: 0.769023831 },
  { law: 'tribble-screen', values: [0, 50, 0.5], lambda2: 0.0441, P: 0.0799144483 },
  { law: 'tribble-screen', values: [0, 50, 3], lambda2: 0.0441, P: 0.433481658 },
  // Rossetti et al. 2008; Mantovani et al. 2009: rm, sigma, cover.
  { law: 'partial-cover', values: [0, 20, 0.5], lambda2: 0.0441, P: 0.605505185 },
  { law: 'partial-cover', values: [0, 50, 0.5], lambda2: 0.0441, P: 0.500029914 },
  { law: 'partial-cover', values: [0, 20, 0.9], lambda2: 0.0441, P: 0.289909333 },
  { law: 'partial-cover', values: [0, 50, 0.9], lambda2: 0.0441, P: 0.100053844 },
  // Sokoloff et al. 1998 (form derived): rm, gradient times FWHM.
  { law: 'depth-gradient', values: [0, 10], lambda2: 0.0441, P: 0.932259384 },
  { law: 'depth-gradient', values: [0, 30], lambda2: 0.0441, P: 0.531901083 },
  // Uniform screen: no depolarization, 2 RM l2.
  { law: 'thin-screen', values: [10], lambda2: 0.0441, P: 1, angle: 0.882 },
];

/** Two slabs, far (p 0.6, chi 0.3, 40 rad m^-2) and near (0.4, 1.0, -25): lambda^2, Q, U (Sokoloff et al. 1998). */
export const twoSlabRows = [
  [0, 0.328742634, 0.702504455],
  [0.01, 0.442062072, 0.669552878],
  [0.0441, 0.53147712, 0.305950972],
] as const;

/** Burn's slab: the first zero of P is at R lambda^2 = pi. */
export const slabZero = { depth: 50, lambda2: 0.06283185307179587 } as const;
