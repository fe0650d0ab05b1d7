import { azimuthProfileSvg } from '../figure/azimuth-profile.ts';
import { measureOnData, type Measured } from '../figure/comparison.ts';
import { pairwisePlotSvg } from '../figure/pairwise-plot.ts';
import { frequencyLabel, profileOfP, profileOfRm } from '../figure/sky-views.ts';
import { writeCsv, type CsvColumn } from '../files/csv-write.ts';
import { writeParquet } from '../files/parquet-write.ts';
import { drawPosterior, summarisePosterior, type Posterior } from '../infer/posterior.ts';
import type { DataSet } from '../infer/types.ts';
import type { Ring } from '../measure/ring-profile.ts';
import { convertQuantity } from '../units/quantity.ts';
import { forwardOf } from '../infer/hypothesis.ts';
import type { FittedRun } from './hypothesis-run.ts';
import type { OutputFolder } from './output-folder.ts';
import type { RunContext } from './run-context.ts';
import { version } from '../files/version.ts';

/** A hypothesis with its posterior. */
export interface SampledRun extends FittedRun {
  readonly posterior?: Posterior;
  /** Profiles of models drawn from the posterior. */
  readonly drawn: readonly Measured[];
}

/** Models drawn from a posterior for predictive bands. */
const predictiveDraws = 40;

/** Profiles round the ring of models drawn from a posterior. */
export async function predictProfiles(run: FittedRun, posterior: Posterior, data: DataSet, ring: Ring, seed: number, context: RunContext): Promise<readonly Measured[]> {
  const forward = forwardOf(run.prepared, data, context.pool.backend);
  const drawn: Measured[] = [];
  for (const [k, values] of drawPosterior(posterior, predictiveDraws, seed).entries()) {
    const scene = run.prepared.sceneOf(values);
    drawn.push(measureOnData(data, scene, ring, await forward(values, context.signal)));
    context.progress.show(`predicting ${run.prepared.name}`, k + 1, predictiveDraws, 'models');
  }
  return drawn;
}

/** Adds a posterior's table, pairwise plot and predictive bands under a folder's name. */
export function addPosteriorFiles(folder: OutputFolder, name: string, run: SampledRun, observed: Measured, data: DataSet, seed: number): void {
  const { posterior, prepared, drawn } = run;
  if (!posterior || prepared.parameters.length === 0) return;
  const columns = posteriorColumns(run, posterior);
  const about = { hypothesis: prepared.name, method: posterior.method, version, seed };
  folder.add(`${name}/posterior.csv`, writeCsv(columns, about));
  folder.add(`${name}/posterior.parquet`, writeParquet(columns, about));
  folder.add(`${name}/pairwise.svg`, pairwisePlotSvg(
    prepared.parameters.map(({ path, unit, shownUnit }, j) => ({
      label: path,
      unit: shownUnit,
      values: Float64Array.from(posterior.samples, (sample) => convertQuantity(sample[j], unit, shownUnit)),
      mark: convertQuantity(run.fit.values[j], unit, shownUnit),
    })),
    { title: `Posterior of ${prepared.name}`, weights: posterior.weights },
  ));
  for (const [k, band] of observed.bands.entries()) {
    const profiles = drawn.flatMap(({ bands }) => { const { profile } = bands[k]; return profile ? [profileOfP(profile, 'model')] : []; });
    if (!band.profile || profiles.length === 0) continue;
    folder.add(`${name}/profile-P-${band.name.replaceAll(' ', '')}.svg`, azimuthProfileSvg({
      quantity: `P, ${frequencyLabel(band.centre.frequencyHz)}`, unit: data.unit, curves: [predictiveBand(profiles)], data: [profileOfP(band.profile, 'observed')],
    }));
  }
  const depths = drawn.flatMap(({ rmProfile }) => (rmProfile ? [profileOfRm(rmProfile, 'model')] : []));
  if (observed.rmProfile && depths.length > 0) {
    folder.add(`${name}/profile-RM.svg`, azimuthProfileSvg({
      quantity: 'RM', unit: 'rad/m^2', curves: [predictiveBand(depths)], data: [profileOfRm(observed.rmProfile, 'observed')],
    }));
  }
}

/** Middle and half width of the 68 % of models round the ring. */
function predictiveBand(profiles: readonly { readonly azimuthDeg: ArrayLike<number>; readonly value: ArrayLike<number> }[]): Parameters<typeof azimuthProfileSvg>[0]['curves'][number] {
  const [{ azimuthDeg }] = profiles;
  const edges = Array.from({ length: azimuthDeg.length }, (_, sector) => {
    const sorted = profiles.map(({ value }) => value[sector]).filter(Number.isFinite).sort((a, b) => a - b);
    const at = (share: number): number => (sorted.length > 0 ? sorted[Math.round(share * (sorted.length - 1))] : NaN);
    return [at(0.16), at(0.84)] as const;
  });
  return { label: '68 % of models', azimuthDeg, value: edges.map(([low, high]) => (low + high) / 2), error: edges.map(([low, high]) => (high - low) / 2) };
}

/** One row per sample: free parameters and derived numbers in shown units, ln likelihood, weight. */
function posteriorColumns({ prepared }: SampledRun, { samples, weights, logLikelihoods }: Posterior): CsvColumn[] {
  const scenes = prepared.derived.length > 0 ? samples.map((sample) => prepared.sceneOf(sample)) : [];
  return [
    ...prepared.parameters.map(({ path, unit, shownUnit }, j): CsvColumn => ({
      name: path, unit: shownUnit, type: 'float64', values: Float64Array.from(samples, (sample) => convertQuantity(sample[j], unit, shownUnit)),
    })),
    ...prepared.derived.map(({ name, unit, value }): CsvColumn => ({ name, unit, type: 'float64', values: Float64Array.from(scenes, value) })),
    { name: 'lnLikelihood', type: 'float64', values: logLikelihoods },
    { name: 'weight', type: 'float64', values: weights, description: 'share of the posterior; weights sum to 1' },
  ];
}

/** Summary of a posterior for JSON, by path, in shown units. */
export function posteriorRecord({ prepared, posterior }: SampledRun): Record<string, unknown> {
  if (!posterior) return {};
  const summaries = prepared.parameters.length > 0 ? summarisePosterior(posterior) : [];
  return {
    ...(posterior.logEvidence && { logEvidence: posterior.logEvidence.value, logEvidenceError: posterior.logEvidence.error }),
    posterior: Object.fromEntries(
      prepared.parameters.map(({ path, unit, shownUnit }, j) => {
        const shown = (value: number): number => convertQuantity(value, unit, shownUnit);
        const { mean, sigma, quantiles } = summaries[j];
        return [path, { unit: shownUnit, mean: shown(mean), sigma: shown(mean + sigma) - shown(mean), 'quantiles 2.5 16 50 84 97.5 %': quantiles.map(shown) }];
      }),
    ),
    effectiveSamples: posterior.effectiveSamples,
    samplerEvaluations: posterior.evaluations,
    believable: posterior.believable,
    ...(posterior.reason && { reason: posterior.reason }),
  };
}
