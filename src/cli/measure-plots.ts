import { azimuthProfileSvg } from '../figure/azimuth-profile.ts';
import { linePlot, type PlotSeries } from '../figure/line-plot.ts';
import { mapPanelSvg } from '../figure/map-panel.ts';
import { svgDocument } from '../figure/svg.ts';
import { hypothesisStyle, lightTheme } from '../figure/theme.ts';
import type { Layout } from '../measure/layout.ts';
import type { RegionMean } from '../measure/region.ts';
import type { RegionSpectrum } from '../measure/region-spectrum.ts';
import type { DepthMaps } from '../sky/depth-maps.ts';
import { makeDepthTransform } from '../sky/depth-transform.ts';
import type { DepthPlan } from '../sky/depth-spectrum.ts';
import { depthsOf } from '../sky/depth-spectrum.ts';
import type { MapData } from './measure-input.ts';
import type { MeasuredBand, RegionLaws } from './measure-run.ts';
import type { OutputFolder } from './output-folder.ts';

const degrees = 180 / Math.PI;

/** A quantity round one ring (or along one strip), a set of points per band. */
function profilePlot(layout: Layout, quantity: string, unit: string, group: number, sets: readonly { readonly label: string; readonly values: readonly (RegionMean | undefined)[] }[]): string {
  const members = [...layout.regions.keys()].filter((k) => layout.regions[k].group === group);
  const series = sets.map(({ label, values }, k) => ({
    label,
    value: members.map((region) => values[region]?.value ?? NaN),
    error: members.map((region) => values[region]?.error ?? NaN),
    colour: hypothesisStyle(k, lightTheme).colour,
  }));
  if (layout.kind === 'rings') {
    const azimuthDeg = members.map((region) => layout.regions[region].azimuth * degrees);
    return azimuthProfileSvg({ quantity, unit, curves: [], data: series.map((one) => ({ ...one, azimuthDeg })) }, { width: 520, height: 300 });
  }
  const x = members.map((region) => layout.regions[region].alongKpc);
  const drawing = linePlot({
    series: series.map(({ label, value, error, colour }): PlotSeries => ({ label, draw: 'points', x, y: value, error, colour })),
    x: { label: 'offset from the major axis', unit: 'kpc' },
    y: { label: quantity, unit, fromZero: true },
    width: 520,
    height: 300,
    legend: true,
    theme: lightTheme,
  });
  return document(drawing, `${quantity} across the disc`);
}

/** |F| of the integrated light over Faraday depth. */
function spectrumPlot(plan: DepthPlan, amplitude: ArrayLike<number>, unit: string): string {
  const drawing = linePlot({
    series: [{ label: 'integrated light', draw: 'line', x: depthsOf(plan), y: amplitude, colour: hypothesisStyle(0, lightTheme).colour }],
    x: { label: 'Faraday depth', unit: 'rad/m2' },
    y: { label: '|F|', unit, fromZero: true },
    width: 560,
    height: 300,
    theme: lightTheme,
  });
  return document(drawing, 'Faraday spectrum of the integrated light');
}

/** |P|(lambda^2) of the integrated light with the laws that fit best. */
function lawPlot({ spectrum, fits }: RegionLaws, unit: string): string {
  const { lambda2M2, q, u, sigma } = spectrum;
  const [low, high] = [Math.min(...lambda2M2), Math.max(...lambda2M2)];
  const x = Float64Array.from({ length: 200 }, (_, k) => low + ((high - low) * k) / 199);
  const curves = fits.slice(0, 3).map(({ law, values }, k): PlotSeries => {
    const style = hypothesisStyle(k, lightTheme);
    return { label: law.title, draw: 'line', x, y: x.map((square) => Math.hypot(...Object.values(law.value(square, values)))), colour: style.colour, dash: style.dash };
  });
  const drawing = linePlot({
    series: [...curves, { label: 'measured', draw: 'points', x: lambda2M2, y: q.map((value, k) => Math.hypot(value, u[k])), error: sigma, colour: lightTheme.ink }],
    x: { label: 'wavelength squared', unit: 'm2' },
    y: { label: spectrum.isFraction ? 'polarized fraction' : 'P', unit: spectrum.isFraction ? '' : unit, fromZero: true },
    width: 560,
    height: 320,
    legend: true,
    theme: lightTheme,
  });
  return document(drawing, 'Depolarization of the integrated light');
}

/** A map of RM, symmetric about 0. */
function rotationPlot({ frame }: MapData, rm: Float64Array): string {
  const { nx, ny, wcs, beam } = frame;
  const pixelArcsec = 3600 * Math.sqrt(Math.abs(wcs.cd[0] * wcs.cd[3] - wcs.cd[1] * wcs.cd[2]));
  return mapPanelSvg({ values: rm, nx, ny, pixelArcsec, unit: 'rad/m2', title: 'RM', kind: 'signed', crpixX: wcs.crpixX, crpixY: wcs.crpixY, ...(beam && { beam }) });
}

function document(drawing: ReturnType<typeof linePlot>, title: string): string {
  return svgDocument(drawing, { title, ink: lightTheme.ink, paper: lightTheme.paper });
}

/** Everything drawn: profiles of every ring or strip, the map of RM, the spectrum and the laws of the integrated light. */
export function addPlots(folder: OutputFolder, data: MapData, layout: Layout, bands: readonly MeasuredBand[], found: { readonly maps?: DepthMaps; readonly rotation?: readonly RegionMean[]; readonly plan?: DepthPlan; readonly light?: RegionSpectrum; readonly fits: readonly RegionLaws[] }): void {
  const { maps, rotation, plan, light, fits } = found;
  for (let group = 0; group < layout.groups; group++) {
    const name = `${layout.kind === 'rings' ? 'ring' : 'strip'}-${group + 1}`;
    folder.add(`plots/P-${name}.svg`, profilePlot(layout, 'P', data.unit, group, bands.map(({ band, regions }) => ({ label: band.name, values: regions.map(({ P }) => P) }))));
    const own = bands.flatMap(({ band, rm, regions }) => (rm ? [{ label: band.name, values: regions.map((region) => region.rm) }] : []));
    if (rotation) folder.add(`plots/RM-${name}.svg`, profilePlot(layout, 'RM', 'rad/m2', group, [{ label: 'all bands', values: rotation }, ...(own.length > 1 ? own : [])]));
  }
  if (maps) folder.add('plots/RM.svg', rotationPlot(data, maps.depth));
  if (plan && light) {
    const { re, im } = makeDepthTransform(plan)(light.q, light.u, 1);
    folder.add('plots/faraday-spectrum.svg', spectrumPlot(plan, re.map((value, k) => Math.hypot(value, im[k])), data.unit));
  }
  if (fits.length > 0) folder.add('plots/laws.svg', lawPlot(fits[0], data.unit));
}
