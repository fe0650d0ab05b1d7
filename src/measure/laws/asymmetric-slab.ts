import { polar, rotation, sinc, source, width, type Law } from './types.ts';

/**
 * A slab that emits and rotates behind a layer that only rotates, such as the near half of a thermal
 * disc thicker than the emitting one, or the foreground. The same law with -depth and rm unchanged:
 * the thickness is given without sign, and rm is the depth down to the slab's middle.
 */
export const asymmetricSlab: Law = {
  name: 'asymmetric-slab',
  title: 'Uniform slab behind a rotating layer',
  source: 'Sokoloff et al. 1998, section 5 (asymmetric slab; form from memory)',
  parameters: [
    ...source(),
    rotation('rm', 'Faraday depth down to the middle of the slab: that of the layer in front and half the slab'),
    width('thickness', 'size of the Faraday depth of the slab'),
  ],
  value: (square, [p, chi, rm, thickness]) => polar(p * sinc(thickness * square), 2 * (chi + rm * square)),
};
