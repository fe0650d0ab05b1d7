import { polar, rotation, sinc, source, type Law } from './types.ts';

/** A uniform slab that emits and rotates: p sinc(R lambda^2) e^{2 i (chi + R lambda^2/2)}. */
export const burnSlab: Law = {
  name: 'burn-slab',
  title: 'Uniform slab',
  source: 'Burn 1966; R is the depth of the whole slab, so that chi(lambda^2) shows R/2',
  parameters: [...source(), rotation('depth', 'Faraday depth of the whole slab')],
  value: (square, [p, chi, depth]) => polar(p * sinc(depth * square), 2 * chi + depth * square),
};
