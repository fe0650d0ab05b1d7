import { polar, rotation, source, width, type Law } from './types.ts';

/**
 * A turbulent screen before a part f of the source, its scale that of the beam, so that the beam sees
 * it in part: p (f (1 + 8 sigma^2 lambda^4)^{-1/2} + 1 - f), the long waves' law of Tribble 1991 with s0 = t.
 */
export const resolvedCover: Law = {
  name: 'resolved-cover',
  title: 'Partly resolved screen over a part',
  source: 'Rossetti et al. 2008; Mantovani et al. 2009, after Tribble 1991; the rotation is common to both parts here',
  parameters: [
    ...source(),
    rotation('rm', 'Faraday depth before the whole source'),
    width('sigma', 'rms of the Faraday depth of the screen'),
    { name: 'cover', unit: '', role: 'share', min: 0, max: 1, meaning: 'share of the emission behind the screen' },
  ],
  value: (square, [p, chi, rm, sigma, cover]) =>
    polar(p * (cover / Math.sqrt(1 + 8 * (sigma * square) ** 2) + 1 - cover), 2 * (chi + rm * square)),
};
