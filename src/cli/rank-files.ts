import { comparisonNotes, comparisonOverview, viewFrame, type Measured } from '../figure/comparison.ts';
import type { LineUpRow } from '../figure/line-up.ts';
import { methodsText } from '../figure/methods-text.ts';
import { overviewSvg } from '../figure/overview.ts';
import { reportHtml, type ReportHypothesis, type ReportParameter } from '../figure/report.ts';
import { frequencyLabel, polarizationView, profileOfP, profileOfRm, rotationMeasureView } from '../figure/sky-views.ts';
import { withError } from '../figure/number-text.ts';
import { chi2Text, deltaAicText, type RankingRow } from '../figure/table.ts';
import { writeCsv } from '../files/csv-write.ts';
import { mapFits } from '../files/sky-fits-write.ts';
import { decidedBy } from '../infer/decided-by.ts';
import type { Likelihood, ResidualPlace } from '../infer/likelihood.ts';
import { compareEvidences, evidenceVerdict, type EvidencePair, type JudgedHypothesis } from '../infer/evidence-verdict.ts';
import { isRandom } from '../infer/random-scenes.ts';
import { structureSentence } from '../infer/whiteness.ts';
import { misfitSentence, rankHypotheses, type RankedHypothesis } from '../infer/rank.ts';
import type { Study } from '../infer/study-types.ts';
import type { DataSet } from '../infer/types.ts';
import type { Ring } from '../measure/ring-profile.ts';
import type { Scene } from '../scene/types.ts';
import { symmetrySentences } from '../ray/symmetry.ts';
import { scenePath } from '../scene/paths.ts';
import { offsetFromPixel } from '../sky/wcs.ts';
import { convertQuantity, formatQuantity } from '../units/quantity.ts';
import { gatherAssumptions } from './assumptions.ts';
import { singleWarning } from './judged-fit.ts';
import { bestTexts, correlationTable, errorTexts, type FittedRun } from './hypothesis-run.ts';
import { addPosteriorFiles, posteriorRecord, type SampledRun } from './posterior-files.ts';
import { whitenessOf, whitenessRecord, type RunWhiteness } from './run-whiteness.ts';
import { bandFileName, slug, type OutputFolder } from './output-folder.ts';
import { version } from '../files/version.ts';

/** Fitted hypotheses in order, best first, with what is said of them. */
export interface RankOutcome {
  readonly ordered: readonly SampledRun[];
  readonly ranked: readonly RankedHypothesis[];
  readonly rows: readonly RankingRow[];
  /** Of the residuals of each in order, and band by band; none where there are no maps. */
  readonly whiteness: readonly RunWhiteness[];
  /** Every pair by evidence; none where there are none. */
  readonly pairs: readonly EvidencePair[];
  readonly verdict: string;
}

/** Orders fitted hypotheses, by evidence where all have it and else by BIC, and says what tells each from the best. */
export function rankRuns(runs: readonly SampledRun[], data: DataSet, likelihood: Likelihood): RankOutcome {
  const ranking = rankHypotheses(
    runs.map(({ prepared, fit }) => ({
      name: prepared.name,
      chi2: fit.chi2,
      logLikelihood: fit.logLikelihood,
      parameters: prepared.parameters.length,
      count: likelihood.count,
      residualCount: likelihood.residualCount,
    })),
  );
  const judged = runs.flatMap(({ prepared, posterior }) =>
    posterior?.logEvidence ? [{ name: prepared.name, logEvidence: posterior.logEvidence.value, error: posterior.logEvidence.error }] : [],
  );
  const byEvidence = judged.length === runs.length;
  const evidence = (name: string): JudgedHypothesis | undefined => (byEvidence ? judged.find((one) => one.name === name) : undefined);
  const ranked = byEvidence
    ? [...ranking.hypotheses].sort((a, b) => evidence(b.name)!.logEvidence - evidence(a.name)!.logEvidence)
    : ranking.hypotheses;
  const ordered = ranked.map(({ name }) => {
    const run = runs.find(({ prepared }) => prepared.name === name);
    if (!run) throw new Error(`hypothesis ${name} was ranked but not fitted`);
    return run;
  });
  const azimuth = azimuthOf(data, ordered[0].bestScene);
  // Residuals of other data come after those of the maps, and have no place in them.
  const ofMaps = ({ fit }: SampledRun): Float64Array => fit.residuals.subarray(0, likelihood.places.length);
  const best = evidence(ranked[0].name);
  const white = ordered.flatMap((run) => whitenessOf(run, data, likelihood) ?? []);
  const rows = ranked.map((hypothesis, k): RankingRow => {
    const decided = k === 0 || data.planes.length === 0 ? undefined : decidedBy(data, likelihood.places, ofMaps(ordered[0]), ofMaps(ordered[k]), azimuth);
    const own = evidence(hypothesis.name);
    return {
      name: hypothesis.name,
      chi2PerN: hypothesis.reducedChi2,
      deltaAic: hypothesis.deltaAic,
      ...(own && best && { deltaLnEvidence: own.logEvidence - best.logEvidence, deltaLnEvidenceError: Math.hypot(own.error, best.error) }),
      ...(white[k] && { neighbours: white[k].all.correlation, neighboursError: white[k].all.error }),
      ...(decided && { decidedBy: decidedText(decided, data) }),
    };
  });
  const unsettled = runs.flatMap(({ prepared, posterior }) =>
    posterior && !posterior.believable ? [`Not to be believed yet: "${prepared.name}". ${posterior.reason}`] : [],
  );
  const verdict = byEvidence ? [evidenceVerdict(judged), misfitSentence(ranked[0])] : [ranking.verdict];
  return {
    ordered,
    ranked,
    rows,
    whiteness: white,
    pairs: byEvidence ? compareEvidences(judged) : [],
    verdict: [...verdict, ...unsettled].filter((sentence) => sentence !== '').join(' '),
  };
}

/** `1.40 GHz, azimuth 150°–240°`. */
function decidedText({ band, arc, deltaChi2 }: ReturnType<typeof decidedBy>, data: DataSet): string {
  if (deltaChi2 <= 0) return 'fewer parameters';
  const { channels } = data.bands[band];
  const frequency = frequencyLabel(channels.reduce((sum, channel) => sum + channel.frequencyHz, 0) / channels.length);
  const degrees = (angle: number): number => Math.round((angle * 180) / Math.PI);
  return arc ? `${frequency}, azimuth ${degrees(arc.from)}°–${degrees(arc.to)}°` : `${frequency}, all round`;
}

/** Galaxy azimuth of a place in the data, undefined outside the disc. */
function azimuthOf({ axes }: DataSet, { galaxy }: Scene): (place: ResidualPlace) => number | undefined {
  const offset = offsetFromPixel(axes.wcs, galaxy.centre ?? { raDeg: 0, decDeg: 0 });
  const { distanceKpc, inclination, positionAngle, volume } = galaxy;
  return ({ pixelX, pixelY }) => {
    const { north, east } = offset(pixelX, pixelY);
    const x = distanceKpc * (north * Math.cos(positionAngle) + east * Math.sin(positionAngle));
    const y = (distanceKpc * (east * Math.cos(positionAngle) - north * Math.sin(positionAngle))) / Math.cos(inclination);
    return Math.hypot(x, y) <= volume.radiusKpc ? Math.atan2(y, x) : undefined;
  };
}

/** Everything that the files of a ranking are made from. */
export interface RankReport {
  readonly study: Study;
  readonly studyFile: string;
  readonly data: DataSet;
  readonly assumptions: readonly string[];
  readonly ring: Ring;
  readonly seed: number;
  readonly outcome: RankOutcome;
  readonly observed: Measured;
  readonly seconds: number;
}

/** `ranking.json`: one record per hypothesis, best first. */
export function rankingRecords({ ordered, ranked, whiteness: white }: RankOutcome): readonly Record<string, unknown>[] {
  return ranked.map((hypothesis, k) => {
    const { prepared, fit } = ordered[k];
    return {
      name: hypothesis.name,
      chi2: hypothesis.chi2,
      dof: hypothesis.degreesOfFreedom,
      aic: hypothesis.aic,
      bic: hypothesis.bic,
      deltaAic: hypothesis.deltaAic,
      deltaBic: hypothesis.deltaBic,
      best: bestTexts(prepared, fit),
      errors: errorTexts(prepared, fit),
      correlations: correlationTable(prepared, fit),
      converged: fit.converged,
      atBound: prepared.parameters.filter((_, j) => fit.atBound[j]).map(({ path }) => path),
      evaluations: fit.evaluations,
      ...whitenessRecord(white[k]),
      ...posteriorRecord(ordered[k]),
    };
  });
}

/** Adds every file of a ranking to a folder. */
export function addRankFiles(folder: OutputFolder, report: RankReport): void {
  const { outcome, data, ring, observed } = report;
  folder.add('ranking.json', `${JSON.stringify(rankingRecords(outcome), null, 2)}\n`);
  folder.add('ranking.csv', rankingCsv(report));
  for (const [k, run] of outcome.ordered.entries()) {
    const name = slug(run.prepared.name);
    const { reducedChi2, deltaAic } = outcome.ranked[k];
    const subtitle = [`χ²/N ${chi2Text(reducedChi2)}`, `Δ AIC ${deltaAicText(deltaAic)}`, ...run.prepared.parameters.map((_, j) => parameterText(run, j))].join('; ');
    folder.add(`${name}/overview.svg`, overviewSvg(comparisonOverview(run.prepared.name, subtitle, run.bestScene, data, observed, run.measured, ring)));
    folder.add(`${name}/best.scene.yaml`, run.bestProvenance.sceneText);
    addModelMaps(folder, name, run, data);
    addPosteriorFiles(folder, name, run, observed, data, report.seed);
  }
  folder.add('report.html', reportHtml(htmlReport(report)));
}

/** `field.halo.strength 1.70 ± 0.02 µG`. */
function parameterText({ prepared, fit }: FittedRun, j: number): string {
  const { path, unit, shownUnit } = prepared.parameters[j];
  const error = Number.isFinite(fit.errors[j]) ? convertQuantity(fit.errors[j], unit, shownUnit) : undefined;
  return `${path} ${withError(convertQuantity(fit.values[j], unit, shownUnit), error, shownUnit)}`;
}

/** Adds model and residual (data less model) maps, one cube per band and Stokes parameter. */
export function addModelMaps(folder: OutputFolder, name: string, run: FittedRun, data: DataSet): void {
  const pixels = data.axes.nx * data.axes.ny;
  for (const [index, band] of data.bands.entries()) {
    for (const quantity of ['I', 'Q', 'U'] as const) {
      const planes = data.planes.flatMap((plane, k) => (plane.band === index && plane.quantity === quantity ? [k] : []));
      if (planes.length === 0) continue;
      planes.sort((a, b) => band.channels[data.planes[a].channel].frequencyHz - band.channels[data.planes[b].channel].frequencyHz);
      const model = new Float64Array(planes.length * pixels);
      planes.forEach((plane, k) => model.set(run.planes[plane], k * pixels));
      const residual = model.map((value, k) => data.planes[planes[Math.floor(k / pixels)]].values[k % pixels] - value);
      const about = {
        unit: data.unit,
        sky: { nx: data.axes.nx, ny: data.axes.ny, wcs: data.axes.wcs },
        band: band.name,
        channels: planes.map((plane) => band.channels[data.planes[plane].channel]),
        ...(band.beam && { beam: band.beam }),
      };
      folder.add(`${name}/model-${quantity}-${bandFileName(band.name)}.fits`, mapFits({ ...about, quantity, values: model }, run.bestProvenance, 32));
      folder.add(`${name}/residual-${quantity}-${bandFileName(band.name)}.fits`, mapFits({ ...about, quantity: `${quantity} residual`, values: residual, comments: ['Data less model.'] }, run.bestProvenance, 32));
    }
  }
}

/** One row per hypothesis and free parameter, so that parameters of different hypotheses fit one table. */
function rankingCsv({ outcome, study, seed }: RankReport): string {
  const rows = outcome.ranked.flatMap((hypothesis, k) => {
    const { prepared, fit } = outcome.ordered[k];
    const common = { place: k + 1, hypothesis, neighbours: outcome.whiteness[k]?.all.correlation ?? NaN };
    if (prepared.parameters.length === 0) return [{ ...common, path: '', value: NaN, error: NaN, unit: '' }];
    return prepared.parameters.map(({ path, unit, shownUnit: shown }, j) => {
      return { ...common, path, value: convertQuantity(fit.values[j], unit, shown), error: convertQuantity(fit.errors[j], unit, shown), unit: shown };
    });
  });
  const numbers = (pick: (row: (typeof rows)[number]) => number): number[] => rows.map(pick);
  return writeCsv(
    [
      { name: 'place', type: 'int64', values: numbers((row) => row.place) },
      { name: 'hypothesis', type: 'string', values: rows.map((row) => row.hypothesis.name) },
      { name: 'chi2', type: 'float64', values: numbers((row) => row.hypothesis.chi2) },
      { name: 'dof', type: 'int64', values: numbers((row) => row.hypothesis.degreesOfFreedom) },
      { name: 'aic', type: 'float64', values: numbers((row) => row.hypothesis.aic) },
      { name: 'bic', type: 'float64', values: numbers((row) => row.hypothesis.bic) },
      { name: 'neighbours', type: 'float64', values: numbers((row) => row.neighbours), description: 'correlation of whitened residuals a beam apart' },
      { name: 'parameter', type: 'string', values: rows.map((row) => row.path) },
      { name: 'value', type: 'float64', values: numbers((row) => row.value), description: 'in the unit of the row' },
      { name: 'error', type: 'float64', values: numbers((row) => row.error), description: 'one standard deviation; nan where a bound holds it' },
      { name: 'unit', type: 'string', values: rows.map((row) => row.unit) },
    ],
    { study: study.title, version, seed },
  );
}

function htmlReport(report: RankReport): Parameters<typeof reportHtml>[0] {
  const { study, studyFile, data, assumptions, ring, seed, outcome, observed, seconds } = report;
  const scene = outcome.ordered[0].bestScene;
  return {
    title: study.title,
    question: `Which of ${outcome.ranked.length} three-dimensional fields makes these maps?`,
    answer: outcome.verdict,
    pairs: outcome.pairs.map(({ sentence }) => sentence),
    data: study.data.map((entry, k) => ({
      quantity: entry.quantity,
      file: entry.files.join(', '),
      about: `noise ${entry.noise?.text ?? `map ${entry.noiseMap ?? ''}`}`,
      assumed: k === 0 ? gatherAssumptions(assumptions) : [],
    })),
    hypotheses: outcome.ordered.map((run, k): ReportHypothesis => {
      const row = outcome.rows[k];
      return {
        name: row.name,
        chi2PerN: row.chi2PerN,
        deltaAic: row.deltaAic,
        ...(row.deltaLnEvidence !== undefined && { deltaLnEvidence: row.deltaLnEvidence, deltaLnEvidenceError: row.deltaLnEvidenceError }),
        ...(row.neighbours !== undefined && { neighbours: row.neighbours, neighboursError: row.neighboursError }),
        ...(row.decidedBy !== undefined && { decidedBy: row.decidedBy }),
        verdict: symmetrySentences(run.bestScene).join(' '),
        parameters: run.prepared.parameters.map((_, j) => reportParameter(run, j)),
        sources: run.bestScene.field.map(({ model }) => ({ model: model.name, source: model.source })),
      };
    }),
    lineUp: lineUpRows(report, scene),
    legend: comparisonNotes(ring),
    caveats: [
      ...outcome.ordered.flatMap(({ prepared }) => (isRandom(prepared.scene) && !prepared.judge ? [singleWarning(prepared.name)] : [])),
      ...outcome.whiteness.slice(0, 1).map(({ all }) => structureSentence(outcome.rows[0].name, all)).filter((sentence) => sentence !== ''),
      ...(study.method === 'least-squares' ? ['Errors are those of a Gaussian likelihood near the best fit; they do not see other minima.'] : []),
      ...outcome.ordered.filter(({ fit }) => !fit.converged).map(({ prepared }) => `The fit of "${prepared.name}" did not converge; its χ² is an upper limit.`),
      ...outcome.ordered.flatMap(({ prepared, fit }) =>
        prepared.parameters.filter((_, j) => fit.atBound[j]).map(({ path }) => `"${prepared.name}": ${path} stands at an end of its range.`),
      ),
    ],
    methods: methodsText({
      tolerance: scene.numerics.tolerance,
      turbulence: scene.turbulence.unresolved !== undefined || scene.turbulence.resolved !== undefined,
      beam: data.bands.some((band) => band.beam !== undefined),
      noise: true,
      debiased: true,
      ...(observed.rm && { rotationMeasure: 'fit' as const }),
      fit: study.method,
    }),
    provenance: [`gyrelight ${version}, seed ${seed}`, `gyrelight rank ${studyFile}`, `${seconds.toFixed(0)} s`],
  };
}

function reportParameter({ prepared, fit, bestScene }: FittedRun, j: number): ReportParameter {
  const { path, unit, shownUnit: shown, prior, calibrationBand } = prepared.parameters[j];
  const text = (value: number): string => formatQuantity(value, unit, shown);
  const allowed = prior.kind === 'normal' ? `normal, ${text(prior.mean)} ± ${text(prior.sigma)}` : `${text(prior.low)} to ${text(prior.high)}`;
  return {
    name: path,
    unit: shown,
    value: convertQuantity(fit.values[j], unit, shown),
    ...(Number.isFinite(fit.errors[j]) && { error: convertQuantity(fit.errors[j], unit, shown) }),
    allowed,
    meaning: calibrationBand === undefined ? scenePath(bestScene, path).meaning : 'factor on the model in this band',
  };
}

function lineUpRows({ data, ring, outcome, observed }: RankReport, scene: Scene): readonly LineUpRow[] {
  const models = outcome.ordered.map((run) => run.measured);
  const rows: LineUpRow[] = observed.bands.map((band, k) => {
    const label = `P, ${frequencyLabel(band.centre.frequencyHz)}`;
    const view = (run: Scene) => viewFrame(data, band, run, ring);
    return {
      kind: 'maps',
      label,
      observed: polarizationView(band.centre, data.unit, view(scene), label),
      models: models.map((model, m) => polarizationView(model.bands[k].centre, data.unit, view(outcome.ordered[m].bestScene), label)),
    };
  });
  const { rm } = observed;
  if (rm) {
    rows.push({
      kind: 'maps',
      label: 'RM, all bands',
      observed: rotationMeasureView(rm, viewFrame(data, observed.bands[0], scene, ring), 'RM'),
      models: models.map((model) => model.rm && rotationMeasureView(model.rm, viewFrame(data, observed.bands[0], scene, ring), 'RM')),
    });
  }
  for (const [k, band] of observed.bands.entries()) {
    if (!band.profile) continue;
    rows.push({
      kind: 'profile',
      label: `P round the ring, ${frequencyLabel(band.centre.frequencyHz)}`,
      quantity: 'P',
      unit: data.unit,
      observed: profileOfP(band.profile, 'observed'),
      models: models.map((model) => { const { profile } = model.bands[k]; return profile && profileOfP(profile, 'model'); }),
    });
  }
  if (rm && observed.rmProfile) {
    rows.push({
      kind: 'profile',
      label: 'RM round the ring',
      quantity: 'RM',
      unit: 'rad/m^2',
      observed: profileOfRm(observed.rmProfile, 'observed'),
      models: models.map((model) => model.rmProfile && profileOfRm(model.rmProfile, 'model')),
    });
  }
  return rows;
}
