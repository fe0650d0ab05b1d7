/**
 * Check values of checks.json (shared reference data), by their ids there. Each was recomputed
 * there from the formula of the publication named; equation numbers are from memory.
 */

/** Burn 1966: P/p0 = sinc(R λ²) e^{i R λ²}; [R rad m^-2, λ² m², |P|/p0, χ rad]. */
export const burnSlab: readonly (readonly [number, number, number, number])[] = [
  [50, 0.01, 0.958851077208406, 0.25],
  [50, 0.0441, 0.36532598834909064, 1.1025],
  [20, 0.0441, 0.8752966426990793, 0.441],
  [100, 0.0441, 0.21646888246263413, 0.6342036732051034],
];

/** Burn 1966; Sokoloff et al. 1998: (1 - e^-S)/S; [R, σ of the full path, λ², |P|/p0, χ rad]. */
export const internalDispersion: readonly (readonly [number, number, number, number, number])[] = [
  [0, 20, 0.0441, 0.5071122822045616, 0],
  [50, 20, 0.0441, 0.23132291235767458, 0.7094671527490394],
  [50, 20, 0.01, 0.9215124646296834, 0.24661013969211454],
  [20, 10, 0.0441, 0.7259538755119719, 0.4109023100599318],
  [50, 0, 0.0441, 0.36532598834909064, 1.1025],
];

/** Sokoloff et al. 1998, two slabs e1 = 0.6, R1 = 40, ψ1 = 0.3 behind e2 = 0.4, R2 = -25, ψ2 = 1; [λ², Q, U]. */
export const twoSlabs: readonly (readonly [number, number, number])[] = [
  [0.01, 0.4420620719127933, 0.6695528783273973],
  [0.0441, 0.5314771204835979, 0.30595097193484616],
];

/** Exponential disc, R = 50, λ² = 0.0441: P/p0 = e^{iRλ²} ∫ cos(Rλ²(1 - w^{1/q})) dw; [q = h_e/h_s, integral]. */
export const exponentialDisc: readonly (readonly [number, number])[] = [
  [0.5, 0.05322450480966189],
  [1, 0.36532598834909064],
  [2, 0.6550917472378888],
];

/** Slab whose angle turns by D over its depth, R = 20, λ² = 0.0441: |sinc(Rλ² + D)| (Burn 1966); [D rad, |P|/p0]. */
export const twistedSlab: readonly (readonly [number, number])[] = [
  [-1.5, 0.9375505544323904],
  [0, 0.8752966426990793],
  [1.5, 0.28909577187867663],
];

/**
 * Rows 15.e2e: p = 2.6, C = 1e-6 cm^-3, B_⊥ = 5 uG at position angle 30°, B_∥ = +2 uG, n_e = 0.03
 * cm^-3, L = 1 kpc; [GHz, I, Q, U in MJy/sr, R rad m^-2].
 */
export const endToEnd: readonly (readonly [number, number, number, number, number])[] = [
  [1.4, 0.013511847850227701, 0.003445243480179225, 0.0004833374345949161, 48.71406984990256],
  [4.8, 0.005042247796681276, -0.0011975003166714974, -0.0034557742961562367, 48.71406984990256],
];

/** R&L 1979 eq. 6.36 per Hz and sr: C = 1e-6 cm^-3, B_⊥ = 5 uG, 1.4 GHz; [p, erg s^-1 cm^-3 Hz^-1 sr^-1]. */
export const emissivity: readonly (readonly [number, number])[] = [
  [2, 1.189331988311977e-38],
  [2.4, 2.7865156473740302e-40],
  [2.6, 4.37889166751413e-41],
  [2.8, 6.981890067072864e-42],
  [3, 1.1276261555366876e-42],
];

/** R&L 1979 eq. 6.38b; [p, (p + 1)/(p + 7/3)]. */
export const intrinsicFraction: readonly (readonly [number, number])[] = [
  [2, 0.6923076923076922],
  [2.2, 0.7058823529411765],
  [2.4, 0.7183098591549295],
  [2.5, 0.7241379310344827],
  [2.6, 0.7297297297297297],
  [2.8, 0.7402597402597403],
  [3, 0.7499999999999999],
  [3.2, 0.7590361445783133],
  [4, 0.7894736842105262],
  [5, 0.8181818181818181],
];

/** Isotropic mean of (sin α)^{(p+1)/2}: √π/2 Γ((p+5)/4)/Γ((p+7)/4); [p, mean] (rows 2.iso). */
export const tangledMean: readonly (readonly [number, number])[] = [
  [2, 0.7188841408413551],
  [2.5, 0.6913193653947708],
  [2.6, 0.6861727670126411],
  [3, 0.6666666666666666],
];

/** Burn 1966; Sokoloff et al. 1998: 1/(1 + 2q²/3), q = b/B_⊥, b the three-dimensional rms, j ∝ B_⊥²; [q, p/p0]. */
export const isotropicTurbulence: readonly (readonly [number, number])[] = [
  [0.5, 0.8571428571428571],
  [1, 0.6],
  [2, 0.2727272727272727],
];
