import { rotation, source, width, type Law } from './types.ts';

/** Turbulence inside an emitting slab: p (1 - e^{-S})/S, S = 2 sigma^2 lambda^4 - 2 i R lambda^2. */
export const internalDispersion: Law = {
  name: 'internal-dispersion',
  title: 'Turbulent slab',
  source: 'Burn 1966; Sokoloff et al. 1998, eq. 34 (from memory); sigma is that of the full path',
  parameters: [...source(), rotation('depth', 'Faraday depth of the whole slab'), width('sigma', 'rms of the Faraday depth of the full path')],
  value: (square, [p, chi, depth, sigma]) => {
    const a = 2 * (sigma * square) ** 2;
    const b = -2 * depth * square;
    const size = a * a + b * b;
    let [x, y] = [1 - a / 2 + (a * a - b * b) / 6, -b / 2 + (a * b) / 3];
    if (size > 1e-8) {
      const fall = Math.exp(-a);
      const [re, im] = [1 - fall * Math.cos(b), fall * Math.sin(b)];
      [x, y] = [(re * a + im * b) / size, (im * a - re * b) / size];
    }
    const [cos, sin] = [p * Math.cos(2 * chi), p * Math.sin(2 * chi)];
    return { re: x * cos - y * sin, im: x * sin + y * cos };
  },
};
