import { gaussLegendre } from '../../math/quadrature.ts';
import { polar, rotation, source, type Law } from './types.ts';

/** Nodes of the mean over the disc, spaced like t^3 towards the far layers where w^{1/q} is steep. */
const nodes = gaussLegendre(96);

/**
 * A symmetric disc, emission e^{-|z|/h_s} and electrons e^{-|z|/h_e} in a uniform field:
 * p e^{i R lambda^2} times the integral of cos(R lambda^2 (1 - w^{1/q})) over w from 0 to 1, q = h_e/h_s.
 */
export const exponentialDisc: Law = {
  name: 'exponential-disc',
  title: 'Exponential disc',
  source: 'derived; Sokoloff et al. 1998 treat it; q = 1 is the uniform slab',
  parameters: [
    ...source(),
    rotation('depth', 'Faraday depth of the whole disc'),
    { name: 'heightRatio', unit: '', role: 'ratio', min: 0.05, max: 20, meaning: 'scale height of the thermal electrons over that of the emission' },
  ],
  value: (square, [p, chi, depth, ratio]) => {
    const phase = depth * square;
    let sum = 0;
    for (let k = 0; k < nodes.nodes.length; k++) {
      const t = (nodes.nodes[k] + 1) / 2;
      const w = t * t * t;
      sum += (nodes.weights[k] / 2) * 3 * t * t * Math.cos(phase * (1 - w ** (1 / ratio)));
    }
    return polar(p * sum, 2 * chi + phase);
  },
};
