import { rotation, sinc, source, type Law } from './types.ts';

/**
 * Two uniform slabs one behind the other, each with its own angle; the near one rotates the far one's
 * emission. Two arrangements give the same light at every wavelength, (near, far) of depths (a, b) and
 * (a + b, -b) with other fractions: the far depth is taken as positive to have one of them.
 */
export const twoSlabs: Law = {
  name: 'two-slabs',
  title: 'Two slabs, one behind the other',
  source: 'Sokoloff et al. 1998 (multilayer slab); Shneider et al. 2014',
  parameters: [
    ...source('Far'),
    { ...rotation('depthFar', 'Faraday depth of the far slab, not negative'), min: 0 },
    ...source('Near'),
    rotation('depthNear', 'Faraday depth of the near slab'),
  ],
  value: (square, [pFar, chiFar, depthFar, pNear, chiNear, depthNear]) => {
    const [far, near] = [pFar * sinc(depthFar * square), pNear * sinc(depthNear * square)];
    const angleFar = 2 * chiFar + (depthFar + 2 * depthNear) * square;
    const angleNear = 2 * chiNear + depthNear * square;
    return { re: far * Math.cos(angleFar) + near * Math.cos(angleNear), im: far * Math.sin(angleFar) + near * Math.sin(angleNear) };
  },
};
