import { polar, rotation, source, width, type Law } from './types.ts';

/** A turbulent screen whose cells the beam does not resolve: p e^{-2 sigma^2 lambda^4}. */
export const externalDispersion: Law = {
  name: 'external-dispersion',
  title: 'Turbulent screen in front',
  source: 'Burn 1966; Sokoloff et al. 1998',
  parameters: [...source(), rotation('rm', 'mean Faraday depth of the screen'), width('sigma', 'rms of its Faraday depth')],
  value: (square, [p, chi, rm, sigma]) => polar(p * Math.exp(-2 * (sigma * square) ** 2), 2 * (chi + rm * square)),
};
