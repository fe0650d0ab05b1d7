/** Keeps powers of squared fields finite where the field vanishes, uG². */
export const smallestFieldSquared = 1e-30;
