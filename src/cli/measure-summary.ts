import type { GradientChange } from '../measure/gradient.ts';
import type { Layout } from '../measure/layout.ts';
import type { RegionPitch } from '../measure/pitch-angle.ts';
import type { DepthPlan } from '../sky/depth-spectrum.ts';
import type { MapData } from './measure-input.ts';
import type { MeasuredBand, RegionLaws, RingHarmonics } from './measure-run.ts';
import { version } from '../files/version.ts';

const degrees = 180 / Math.PI;

interface SummaryParts {
  readonly data: MapData;
  readonly layout: Layout;
  readonly bands: readonly MeasuredBand[];
  readonly plan: DepthPlan | undefined;
  readonly fits: readonly RegionLaws[];
  readonly pitches: readonly RegionPitch[] | undefined;
  readonly axis: number;
  readonly harmonics: readonly RingHarmonics[];
  readonly change: GradientChange | undefined;
  readonly files: readonly string[];
}

/** What `summary.json` says of a run of `measure`. Angles in degrees; numbers that do not exist are null. */
export function measureSummary({ data, layout, bands, plan, fits, pitches, axis, harmonics, change, files }: SummaryParts): Record<string, unknown> {
  return {
    version,
    unit: data.unit,
    assumed: data.notes,
    bands: bands.map(({ band, centre, gradient }) => ({
      name: band.name,
      frequenciesHz: band.channels.map(({ frequencyHz }) => frequencyHz),
      noise: Array.from(band.noise),
      centreHz: centre.frequencyHz,
      ...(gradient && { rmGradient: { axisDeg: axis * degrees, perKpc: gradient.gradient, error: gradient.gradientError, pixels: gradient.pixels } }),
    })),
    ...(change && { rmGradientChange: { perKpcPerM2: change.change, error: change.changeError, significance: change.significance } }),
    ...(plan && {
      depthSpectrum: {
        resolution: plan.resolution,
        largestDepth: plan.largestDepth,
        largestScale: plan.largestScale,
        referenceLambda2: plan.referenceLambda2,
        noise: plan.noise,
        depths: { first: plan.firstDepth, step: plan.step, count: plan.count },
      },
    }),
    layout: layout.kind,
    rings: harmonics.map(({ group, quantity, harmonics: fit, approachingReceding, nearFar }) => {
      const { innerKpc, outerKpc } = layout.regions.find((region) => region.group === group) ?? { innerKpc: NaN, outerKpc: NaN };
      return {
        innerKpc,
        outerKpc,
        quantity,
        ...(fit && {
          mean: { value: fit.mean, error: fit.meanError },
          chi2: fit.chi2,
          dof: fit.degreesOfFreedom,
          harmonics: fit.harmonics.map((harmonic) => ({
            order: harmonic.order,
            amplitude: harmonic.amplitude,
            error: harmonic.amplitudeError,
            significance: harmonic.amplitude / harmonic.amplitudeError,
            phaseDeg: harmonic.phase * degrees,
            phaseErrorDeg: harmonic.phaseError * degrees,
            overMean: harmonic.amplitude / Math.abs(fit.mean),
          })),
        }),
        approachingReceding,
        nearFar,
      };
    }),
    ...(pitches && { pitch: ringPitches(layout, pitches) }),
    ...(fits.length > 0 && { integratedLaws: fits[0].fits.map(({ law, values, errors, chi2, degreesOfFreedom, aic, bic }) => ({
      law: law.name,
      chi2,
      dof: degreesOfFreedom,
      aic,
      bic,
      parameters: Object.fromEntries(law.parameters.map(({ name, unit }, k) => [name, unit === 'rad' ? { value: values[k] * degrees, error: errors[k] * degrees, unit: 'deg' } : { value: values[k], error: errors[k], unit }])),
    })) }),
    files,
  };
}

/** Pitch of each ring: that of its sectors' mean direction, weighted by their pixels. */
function ringPitches(layout: Layout, pitches: readonly RegionPitch[]): unknown[] {
  return Array.from({ length: layout.groups }, (_, group) => {
    const members = [...layout.regions.keys()].filter((k) => layout.regions[k].group === group && Number.isFinite(pitches[k].pitch));
    let [re, im, variance, total] = [0, 0, 0, 0];
    for (const k of members) {
      const { pitch, pixels, error, scatterError } = pitches[k];
      re += pixels * Math.cos(2 * pitch);
      im += pixels * Math.sin(2 * pitch);
      variance += (pixels * Math.max(error, scatterError)) ** 2;
      total += pixels;
    }
    const { innerKpc, outerKpc } = layout.regions.find((region) => region.group === group) ?? { innerKpc: NaN, outerKpc: NaN };
    return { innerKpc, outerKpc, pitchDeg: total > 0 ? (Math.atan2(im, re) / 2) * degrees : NaN, errorDeg: total > 0 ? (Math.sqrt(variance) / total) * degrees : NaN };
  });
}
