import { falsePeakChance } from '../sky/depth-peak.ts';
import type { DepthPlan } from '../sky/depth-spectrum.ts';
import type { Layout } from '../measure/layout.ts';
import type { GradientChange } from '../measure/gradient.ts';
import type { MapData } from './measure-input.ts';
import type { MeasuredBand, RegionLaws } from './measure-run.ts';

const depthText = (value: number): string => `${numberText(value)} rad/m^2`;

/** What the channels can tell, said before the work. */
export function planWords({ bands, unit }: MapData, layout: Layout, plan: DepthPlan | undefined, channels: number, noise: readonly number[], threshold: number): string[] {
  const first = `${bands.length} band${bands.length === 1 ? '' : 's'}, ${channels} channel${channels === 1 ? '' : 's'}; ${layout.groups} ${layout.kind}, ${layout.regions.length} regions`;
  const isSilent = noise.some((rms) => !(rms > 0));
  const silent = isSilent ? ['no noise is stated (--noise): errors of maps and profiles are 0, those of laws come from the scatter'] : [];
  if (!plan) return [first, ...silent];
  // Depths a resolution apart are independent, nearly.
  const chance = falsePeakChance(threshold, Math.max(1, ((plan.count - 1) * plan.step) / plan.resolution));
  return [
    first,
    ...silent,
    `Faraday spectrum: resolution ${depthText(plan.resolution)}, largest depth ${depthText(plan.largestDepth)}, largest scale ${depthText(plan.largestScale)}`,
    `depths ${depthText(plan.firstDepth)} to ${depthText(plan.firstDepth + plan.step * (plan.count - 1))} in steps of ${depthText(plan.step)}; noise of the spectrum ${plan.noise.toExponential(2)} ${unit}`,
    ...(isSilent ? [] : [`threshold ${threshold} times the noise: in a pixel without polarization a false peak with a chance of ${chance > 0 ? numberText(chance, 2) : 'nothing'}`]),
  ];
}

/** What was found, said after the work. */
export function resultWords(bands: readonly MeasuredBand[], axis: number, change: GradientChange | undefined, fits: readonly RegionLaws[]): string[] {
  const angle = numberText((axis * 180) / Math.PI);
  const gradients = bands.flatMap(({ band, gradient }) =>
    gradient && Number.isFinite(gradient.gradient) ? [`RM gradient along ${angle} deg, ${band.name}: ${withError(gradient.gradient, gradient.gradientError)} rad/m^2 per kpc`] : [],
  );
  const best = fits[0]?.fits[0];
  return [
    ...gradients,
    ...(change ? [`its change with wavelength: ${withError(change.change, change.changeError)} rad/m^2 per kpc and m^2${change.changeError > 0 ? ` (${numberText(change.significance)} sigma)` : ''}`] : []),
    ...(best ? [`integrated light: ${best.law.title} fits best (χ² ${best.chi2.toFixed(1)} for ${best.degreesOfFreedom} degrees of freedom)`] : []),
  ];
}

function withError(value: number, error: number): string {
  return error > 0 ? `${numberText(value)} +- ${numberText(error, 2)}` : numberText(value);
}

function numberText(value: number, digits = 3): string {
  return String(Number(value.toPrecision(digits)));
}
