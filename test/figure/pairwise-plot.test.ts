import { expect, it } from 'vitest';
import { pairwisePlotSvg } from '../../src/figure/pairwise-plot.ts';
import { randomStream } from '../../src/math/random.ts';

const random = randomStream(1, 'pairs');
const samples = Array.from({ length: 4000 }, () => [random.gaussian(), random.gaussian()]);
const a = { label: 'field.disc.strength', unit: 'uG', values: samples.map(([x]) => x), mark: 0 };
const b = { label: 'galaxy.inclination', unit: 'deg', values: samples.map(([, y]) => 40 + 2 * y) };

it('has contours below the diagonal, a histogram on it, and the same bytes each time', () => {
  const svg = pairwisePlotSvg([a, b], { title: 'Posterior <1>' });
  expect(svg.match(/class="contour"/g)).toHaveLength(2);
  expect(svg.match(/class="quantiles"/g)).toHaveLength(2);
  expect(svg.match(/class="mark"/g)).toHaveLength(2);
  expect(svg).toContain('Posterior &lt;1&gt;');
  expect(svg).toContain('disc.strength (µG)');
  expect(pairwisePlotSvg([a, b], { title: 'Posterior <1>' })).toBe(svg);
});

it('draws the inner contour of a Gaussian at one sigma: the share inside is 39.3 per cent (1 - e^-1/2)', () => {
  const svg = pairwisePlotSvg([a, { ...b, values: samples.map(([, y]) => y) }], { title: 't', panel: 100 });
  const paths = [...svg.matchAll(/class="contour" d="([^"]+)"/g)].map(([, d]) => d);
  const inner = paths[paths.length - 1].match(/-?[\d.]+,-?[\d.]+/g)!.map((pair) => Number(pair.split(',')[0]));
  const width = Math.max(...inner) - Math.min(...inner);
  // The panel spans about +-3.4 sigma (0.2 to 99.8 % and a sixth of room), 14.9 px a sigma; smoothing and bins widen by a tenth or two.
  expect(width / 2 / 14.9).toBeGreaterThan(0.85);
  expect(width / 2 / 14.9).toBeLessThan(1.35);
});

it('gives every sample its weight', () => {
  const weights = samples.map(([x]) => (x > 0 ? 1 : 0));
  expect(pairwisePlotSvg([a], { title: 't', weights })).toContain('strength = 0.6');
});
