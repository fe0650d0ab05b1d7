import { polar, rotation, source, type Law } from './types.ts';

/** A source behind a uniform screen: rotation without depolarization. */
export const thinScreen: Law = {
  name: 'thin-screen',
  title: 'Uniform screen in front',
  source: 'Burn 1966',
  parameters: [...source(), rotation('rm', 'Faraday depth of the screen')],
  value: (square, [p, chi, rm]) => polar(p, 2 * (chi + rm * square)),
};
