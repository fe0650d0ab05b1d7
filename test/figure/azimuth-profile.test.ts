import { describe, expect, it } from 'vitest';
import { azimuthProfile, azimuthProfileSvg } from '../../src/figure/azimuth-profile.ts';
import { linePlot, paddedDomain } from '../../src/figure/line-plot.ts';
import { lightTheme } from '../../src/figure/theme.ts';
import { sampleSectors } from './sample.ts';
import { expectWellFormed } from './well-formed.ts';

const numbers = (path: string): number[][] => [...path.matchAll(/([\d.-]+),([\d.-]+)/g)].map((m) => [Number(m[1]), Number(m[2])]);
const curve = (svg: string): string => /class="curve" d="([^"]+)"/.exec(svg)?.[1] ?? '';

describe('profile round a ring', () => {
  const profile = { quantity: 'P', unit: 'Jy/beam', curves: [{ label: 'a <b> & "c"', ...sampleSectors(0.5), error: undefined }], data: [{ label: 'observed', ...sampleSectors(0.5, 5) }] };

  it('is well formed, repeats byte for byte and names what lies where', (context) => {
    const svg = azimuthProfileSvg(profile);
    expectWellFormed(context, svg);
    expect(azimuthProfileSvg(profile)).toBe(svg);
    const words = [...svg.matchAll(/<text x="([\d.]+)"[^>]*>(receding|far|approaching|near)</g)].map((m) => [m[2], Number(m[1])]);
    // 356 px of axis: the near side is at 270 deg, where y < 0 (physics contract, section 2).
    expect(words).toEqual([['receding', 0], ['far', 89], ['approaching', 178], ['near', 267]]);
    expect(svg).toContain('P (µJy/beam)');
  });

  it('draws the points where the numbers are, error bars about them', () => {
    const { body } = azimuthProfile({ ...profile, curves: [], domain: [0, 4e-4] }, { width: 424, height: 248, legend: false });
    const dots = [...body.matchAll(/<circle cx="([\d.]+)" cy="([\d.]+)" r="2.7"/g)].map((m) => [Number(m[1]), Number(m[2])]);
    expect(dots.length).toBe(18);
    const { azimuthDeg, value } = profile.data[0];
    dots.forEach(([x, y], k) => {
      expect(Math.abs(x - azimuthDeg[k])).toBeLessThan(0.006); // 360 px for 360 deg, two decimals
      expect(Math.abs(y - 200 * (1 - value[k] / 4e-4))).toBeLessThan(0.006);
    });
    const [, x, low, high] = /class="error-bars" d="M([\d.]+),([\d.]+)V([\d.]+)/.exec(body)!.map(Number);
    expect(x).toBe(0);
    expect(Math.abs(low - high - 200 * (2.2e-5 / 4e-4))).toBeLessThan(0.011);
  });

  it('closes the curve over both ends, from sectors in any order and turn', () => {
    const sectors = { label: 'm', azimuthDeg: [270 - 360, 90, 180], value: [1, 3, 2] };
    const { body } = azimuthProfile({ quantity: 'x', unit: '', curves: [sectors], domain: [0, 4] }, { width: 424, height: 248, legend: false });
    expect(numbers(curve(body)).map(([x, y]) => [x, 4 - y / 50])).toEqual([[-90, 1], [90, 3], [180, 2], [270, 1], [450, 3]]);
  });

  it('leaves gaps at blanks instead of lines across them', () => {
    const azimuthDeg = [0, 60, 120, 180, 240, 300];
    const { body } = azimuthProfile({ quantity: 'x', unit: '', curves: [{ label: 'm', azimuthDeg, value: [1, 2, NaN, 2, 1, 1] }] });
    expect(curve(body).match(/M/g)?.length).toBe(2);
    const dots = azimuthProfile({ quantity: 'x', unit: '', curves: [], data: [{ label: 'd', azimuthDeg, value: [1, NaN, 1, 1, 1, 1], error: [1, 1, NaN, 1, 1, 1] }] }, { legend: false });
    expect(dots.body.match(/<circle/g)?.length).toBe(5);
    expect(dots.body).not.toContain('NaN');
  });
});

describe('line plots', () => {
  it('find a domain that holds values, errors and zero', () => {
    const [low, high] = paddedDomain([{ values: [1, 2], error: [0.5, NaN] }]);
    expect([low, high].map((x) => Math.round(x * 1e6))).toEqual([425000, 2075000]);
    expect(paddedDomain([{ values: [5, 10] }], true)).toEqual([0, 10.5]);
    expect(paddedDomain([{ values: [-10, -5] }], true)[1]).toBe(0.5);
    expect(paddedDomain([{ values: [NaN] }])).toEqual([0, 1]);
    expect(paddedDomain([{ values: [3, 3] }])).toEqual([1.5, 4.5]);
  });

  it('draw a band about a line with errors and wrap a long legend', () => {
    const one = (label: string) => ({ label, draw: 'line' as const, x: [0, 1], y: [0, 1], error: [0.1, 0.1], colour: '#123456' });
    const plot = linePlot({
      series: Array.from({ length: 6 }, (_, k) => one(`a rather long name ${k}`)), x: { label: 'λ²', unit: 'm^2' }, y: { label: 'y' },
      width: 300, height: 200, legend: true, theme: lightTheme,
    });
    expect(plot.body.match(/class="band"/g)?.length).toBe(6);
    expect(plot.body).toContain('λ² (m²)');
    const rows = new Set([...plot.body.matchAll(/y="([\d.]+)"[^>]*>a rather/g)].map((m) => m[1]));
    expect(rows.size).toBe(6);
    expect([plot.width, plot.height]).toEqual([300, 200]);
  });
});
