import type { Sightline } from '../ray/sightline.ts';
import { linePlot, paddedDomain, type PlotSeries } from './line-plot.ts';
import { frequencyLabel } from './sky-views.ts';
import { element, moved, textElement, type Drawing } from './svg.ts';
import { hypothesisStyle, type Theme } from './theme.ts';

const stripWidth = 132;
const firstWidth = 168;
const height = 300;

/**
 * What lies along one line of sight, height above the plane upwards (distance towards the observer where
 * the disc is seen edge-on): the field along it, electrons, emission, Faraday depth, and which layer each
 * wavelength sees; a curve to the left of zero there cancels what lies to the right.
 */
export function sightlineDrawing(sightline: Sightline, theme: Theme): Drawing {
  const { sKpc, zKpc } = sightline;
  const rises = Math.abs(zKpc[zKpc.length - 1] - zKpc[0]) > 0.05 * Math.abs(sKpc[sKpc.length - 1] - sKpc[0]);
  const up = rises ? zKpc : sKpc;
  const upLabel = rises ? 'height z' : 'towards the observer';
  const strips: { readonly label: string; readonly unit: string; readonly series: readonly PlotSeries[] }[] = [
    { label: 'B∥', unit: 'uG', series: [curve('B∥', sightline.alongUG, up, theme.ink)] },
    { label: 'nₑ', unit: 'cm^-3', series: [curve('nₑ', sightline.electrons, up, theme.ink)] },
    {
      label: 'emission',
      unit: '',
      series: sightline.light.slice(0, 1).map(({ emission }) => curve('emission', overLargest(emission), up, theme.ink)),
    },
    { label: 'depth to us', unit: 'rad/m^2', series: [curve('φ', sightline.depth, up, theme.ink)] },
    {
      label: 'share seen',
      unit: '',
      series: sightline.light.map(({ frequencyHz, share, emittedP }, k) => {
        const style = hypothesisStyle(k, theme);
        const step = Math.abs(up[1] - up[0]) || 1;
        return { ...curve(frequencyLabel(frequencyHz), share.map((value) => value / (emittedP || 1) / step), up, style.colour), dash: style.dash };
      }),
    },
  ];
  const domain = paddedDomain([{ values: up }]);
  let x = 0;
  let body = '';
  strips.forEach(({ label, unit, series }, k) => {
    const width = k === 0 ? firstWidth : k === strips.length - 1 ? firstWidth : stripWidth;
    const plot = linePlot({
      series,
      x: { label, unit, fromZero: true },
      y: { label: k === 0 ? upLabel : '', unit: k === 0 ? 'kpc' : '', domain },
      width,
      height,
      theme,
    });
    body += moved(plot.body, x, 16);
    x += width;
  });
  const names = strips[4].series.map(({ label, colour, dash }, k) =>
    element('path', { d: `M${x + 2},${30 + 14 * k}h18`, stroke: colour, 'stroke-dasharray': dash, 'stroke-width': 1.6, fill: 'none' }) +
    textElement(x + 25, 33.5 + 14 * k, label, { 'font-size': 10, fill: theme.soft }),
  );
  return { width: x + 84, height: height + 18, body: body + names.join('') };
}

function curve(label: string, values: ArrayLike<number>, up: ArrayLike<number>, colour: string): PlotSeries {
  return { label, draw: 'line', x: values, y: up, colour };
}

function overLargest(values: Float64Array): Float64Array {
  const largest = values.reduce((most, value) => Math.max(most, value), 0) || 1;
  return values.map((value) => value / largest);
}
