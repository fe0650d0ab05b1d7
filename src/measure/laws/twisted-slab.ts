import { polar, rotation, sinc, source, type Law } from './types.ts';

/**
 * A slab whose field turns evenly with depth: p sinc(R lambda^2 + D) e^{i (2 chi + R lambda^2 + D)},
 * chi the angle at the near face.
 */
export const twistedSlab: Law = {
  name: 'twisted-slab',
  title: 'Slab with a turning field',
  source: 'Burn 1966; Sokoloff et al. 1998; Horellou & Fletcher 2014',
  parameters: [
    ...source(),
    rotation('depth', 'Faraday depth of the whole slab'),
    { name: 'twist', unit: 'rad', role: 'twist', min: -20, max: 20, meaning: 'turn of the intrinsic angle from the near to the far side; depolarization vanishes at lambda^2 = -twist/depth' },
  ],
  value: (square, [p, chi, depth, twist]) => polar(p * sinc(depth * square + twist), 2 * chi + depth * square + twist),
};
