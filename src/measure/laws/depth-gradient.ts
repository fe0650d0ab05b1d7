import { polar, rotation, source, width, type Law } from './types.ts';

/** A foreground whose depth changes evenly across a Gaussian beam: p exp(-(lambda^2 g theta)^2/(4 ln 2)). */
export const depthGradient: Law = {
  name: 'depth-gradient',
  title: 'Gradient of the foreground',
  source: 'Sokoloff et al. 1998 (form derived); of the same shape as external dispersion: data cannot tell the two apart',
  parameters: [...source(), rotation('rm', 'Faraday depth at the middle of the beam'), width('change', 'change of the depth over the FWHM of the beam')],
  value: (square, [p, chi, rm, change]) => polar(p * Math.exp(-((square * change) ** 2) / (4 * Math.LN2)), 2 * (chi + rm * square)),
};
