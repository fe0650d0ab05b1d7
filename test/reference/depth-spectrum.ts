/** Set-ups of channels of equal width and weight, with the rows of check values that say what they can tell. */
export const surveys = [
  { id: '6.exp.A', from: 1e9, to: 2e9, channels: 1024 },
  { id: '6.exp.B', from: 1.2e8, to: 1.8e8, channels: 2000 },
  { id: '6.exp.C', from: 2e9, to: 4e9, channels: 512 },
  { id: '6.exp.array92cm', from: 3.15e8, to: 3.78e8, channels: 126 },
] as const;

/** Row 6.dirichlet: 200 samples evenly from 0.02 to 0.09 m^2, at 30 rad m^-2. */
export const dirichlet = { first: 0.02, last: 0.09, count: 200, depth: 30 } as const;

/** Row 6.two: two thin screens at 1 to 2 GHz, 1024 channels. */
export const twoScreens = [
  { depth: 150, P: 1, chi0: 0.3 },
  { depth: -60, P: 0.7, chi0: 1 },
] as const;
