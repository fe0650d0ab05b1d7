import { polar, rotation, source, width, type Law } from './types.ts';

/**
 * A turbulent screen that the beam resolves in part: p^2 = (1 - E)/(1 + 8 sigma^2 lambda^4/x^2) + E,
 * E = exp(-x^2/2 - 4 sigma^2 lambda^4), x = s0/t. At long wavelengths p falls as lambda^-2 only.
 */
export const tribbleScreen: Law = {
  name: 'tribble-screen',
  title: 'Partly resolved turbulent screen',
  source: 'Tribble 1991; s0 is the scale where the structure function reaches 2 sigma^2, t the radius where the beam is 1/e (FWHM = 1.665 t)',
  parameters: [
    ...source(),
    rotation('rm', 'mean Faraday depth of the screen'),
    width('sigma', 'rms of its Faraday depth'),
    { name: 'scaleRatio', unit: '', role: 'ratio', min: 0, max: 20, meaning: 'scale of the screen over the 1/e radius of the beam, s0/t' },
  ],
  value: (square, [p, chi, rm, sigma, ratio]) => {
    const turn = (sigma * square) ** 2;
    const left = Math.exp(-(ratio * ratio) / 2 - 4 * turn);
    const resolved = ratio * ratio === 0 ? 0 : ((1 - left) * ratio * ratio) / (ratio * ratio + 8 * turn);
    return polar(p * Math.sqrt(resolved + left), 2 * (chi + rm * square));
  },
};
