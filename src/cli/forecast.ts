import type { Command } from 'commander';
import { forecastSvg } from '../figure/forecast-plot.ts';
import { textTable } from '../figure/table.ts';
import { writeCsv } from '../files/csv-write.ts';
import { expectedEvidence, type ExpectedEvidence, type ForecastHypothesis } from '../infer/forecast.ts';
import { makeLikelihood } from '../infer/likelihood.ts';
import { plannedData } from '../infer/planned-data.ts';
import { evidenceGrade, rankHypotheses } from '../infer/rank.ts';
import type { CandidateBand } from '../infer/study-types.ts';
import type { DataSet } from '../infer/types.ts';
import { convertQuantity } from '../units/quantity.ts';
import { InputError } from '../units/input-error.ts';
import { forwardOf } from '../infer/hypothesis.ts';
import type { FittedRun } from './hypothesis-run.ts';
import { OutputFolder } from './output-folder.ts';
import { durationText } from './progress.ts';
import { addStudyFlags } from './rank.ts';
import { sayWords, withRunContext, type RunContext } from './run-context.ts';
import { loadStudy, type LoadedStudy, type StudyFlags } from './study-load.ts';
import { runStudy } from './study-run.ts';
import { version } from '../files/version.ts';

interface ForecastFlags extends StudyFlags {
  readonly first?: string;
  readonly second?: string;
}

/** `gyrelight forecast STUDY`: which further band would separate two hypotheses. */
export function addForecast(program: Command): void {
  addStudyFlags(program.command('forecast <study>').description('which further band would tell two hypotheses apart, and what it would fix'))
    .option('--first <name>', 'one of the two hypotheses (default: the two that fit best)')
    .option('--second <name>', 'the other one')
    .action((path: string, flags: ForecastFlags) => forecast(path, flags));
}

/** One candidate (none: the data as they are), with either hypothesis true. */
interface Outlook {
  readonly candidate?: CandidateBand;
  readonly ifFirst: ExpectedEvidence;
  readonly ifSecond: ExpectedEvidence;
}

async function forecast(path: string, flags: ForecastFlags): Promise<void> {
  const started = Date.now();
  const loaded = loadStudy(path, flags);
  const { study, data } = loaded;
  if (study.candidates.length === 0) {
    throw new InputError('the study has no `forecast: {bands: [...]}` or `forecast: {scan: ...}`: the bands to choose between', { file: path });
  }
  if (data.planes.length === 0) throw new InputError('a forecast needs maps of I, Q or U among the data', { file: path });
  const judged = loaded.prepared.find((one) => one.judge);
  if (judged) {
    throw new InputError(`"${judged.name}" has drawn turbulence, whose scatter a forecast does not know; give its scene \`unresolved\` turbulence, or state \`turbulence: single\` in the study`, { file: path });
  }
  const planned = study.candidates.map((candidate) => plannedData(data, candidate));
  const { runs, clear } = await runStudy(loaded, 'least-squares', flags);
  const [first, second] = pairOf(runs, loaded, flags);
  const outlooks = await withRunContext(flags, async (context) => {
    const found: Outlook[] = [];
    for (const [k, candidate] of [undefined, ...study.candidates].entries()) {
      context.progress.show('weighing bands', k, study.candidates.length + 1, 'bands', candidate?.name ?? 'the data as they are');
      found.push(await outlookOf(first, second, candidate, candidate ? planned[k - 1] : plannedData(data), context));
    }
    return found;
  });
  const [now, ...others] = outlooks;
  const worth = ({ ifFirst, ifSecond }: Outlook): number => Math.min(ifFirst.deltaLogEvidence, ifSecond.deltaLogEvidence);
  const best = others.reduce((a, b) => (worth(b) > worth(a) ? b : a));
  const verdict = verdictText(best, now, worth, first, second);
  const folder = new OutputFolder(flags.out);
  folder.add('forecast.json', `${JSON.stringify({ study: path, first: first.prepared.name, second: second.prepared.name, verdict, bands: outlooks.map((one) => record(one, first, second)) }, null, 2)}\n`);
  folder.add('forecast.csv', forecastCsv(others, first, second, loaded.seed));
  folder.add('forecast.svg', forecastSvg(others.map(({ candidate }) => middleGHz(candidate!)), ([['ifFirst', first], ['ifSecond', second]] as const).map(([key, run]) => ({
    label: `if "${run.prepared.name}" is true`,
    deltaLogEvidence: others.map((one) => one[key].deltaLogEvidence),
    scatter: others.map((one) => one[key].scatter),
    now: now[key].deltaLogEvidence,
  }))));
  folder.write();
  clear();
  if (flags.json) process.stdout.write(`${JSON.stringify({ verdict, bands: outlooks.map((one) => record(one, first, second)), files: folder.names }, null, 2)}\n`);
  const text = ({ deltaLogEvidence, scatter }: ExpectedEvidence): string => `${deltaLogEvidence.toFixed(1)} ± ${scatter.toFixed(1)}`;
  sayWords(flags, '', textTable(
    [{ title: 'added band', align: 'left' }, { title: `Δ ln Z if "${first.prepared.name}"`, align: 'right' }, { title: `if "${second.prepared.name}"`, align: 'right' }],
    outlooks.map(({ candidate, ifFirst, ifSecond }) => [candidate?.name ?? 'none', text(ifFirst), text(ifSecond)]),
  ), '', `${verdict} Table and figure: ${flags.out}/ (${durationText((Date.now() - started) / 1000)})`);
}

/** The two hypotheses that are named, or the two that fit best. */
function pairOf(runs: readonly FittedRun[], { likelihood, file }: LoadedStudy, { first, second }: ForecastFlags): readonly [FittedRun, FittedRun] {
  if (runs.length < 2) throw new InputError('a forecast needs two hypotheses', { file });
  const ranked = rankHypotheses(runs.map(({ prepared, fit }) => ({
    name: prepared.name, chi2: fit.chi2, logLikelihood: fit.logLikelihood, parameters: prepared.parameters.length,
    count: likelihood.count, residualCount: likelihood.residualCount,
  }))).hypotheses.map(({ name }) => name);
  const named = (name: string, flag: string): FittedRun => {
    const run = runs.find(({ prepared }) => prepared.name === name);
    if (!run) throw new InputError(`the study has no hypothesis "${name}"; there are: ${ranked.join(', ')}`, { flag });
    return run;
  };
  const one = named(first ?? ranked.find((name) => name !== second) ?? ranked[0], '--first');
  const other = named(second ?? ranked.find((name) => name !== one.prepared.name) ?? ranked[1], '--second');
  if (one === other) throw new InputError(`"${second}" cannot be told from itself; name two hypotheses`, { flag: '--second' });
  return [one, other];
}

async function outlookOf(first: FittedRun, second: FittedRun, candidate: CandidateBand | undefined, planned: DataSet, context: RunContext): Promise<Outlook> {
  const likelihood = makeLikelihood(planned);
  const [a, b] = [first, second].map(({ prepared, fit }): ForecastHypothesis => ({
    parameters: prepared.parameters, values: fit.values, forward: forwardOf(prepared, planned, context.pool.backend),
  }));
  const ifFirst = await expectedEvidence(a, b, likelihood, context.signal);
  const ifSecond = await expectedEvidence(b, a, likelihood, context.signal);
  return { ...(candidate && { candidate }), ifFirst, ifSecond };
}

function verdictText(best: Outlook, now: Outlook, worth: (one: Outlook) => number, first: FittedRun, second: FittedRun): string {
  const names = `"${first.prepared.name}" from "${second.prepared.name}"`;
  const grade = evidenceGrade(2 * worth(best));
  const gain = `expected Δ ln Z ${worth(best).toFixed(1)} or more, whichever is true; ${worth(now).toFixed(1)} without it`;
  return grade === 'bare mention'
    ? `None of these bands would tell ${names}; the best is ${best.candidate!.name} (${gain}).`
    : `${best.candidate!.name} would tell ${names} best: ${grade} evidence on the scale of Kass & Raftery 1995 (${gain}).`;
}

function record({ candidate, ifFirst, ifSecond }: Outlook, first: FittedRun, second: FittedRun): Record<string, unknown> {
  const side = (expected: ExpectedEvidence, { prepared }: FittedRun): Record<string, unknown> => ({
    true: prepared.name,
    deltaLogEvidence: expected.deltaLogEvidence,
    scatter: expected.scatter,
    errors: Object.fromEntries(prepared.parameters.map(({ path, unit, shownUnit }, j) => {
      const error = convertQuantity(expected.errors[j], unit, shownUnit);
      return [path, Number.isFinite(error) ? { value: error, unit: shownUnit } : null];
    })),
  });
  return { band: candidate?.name ?? null, ...(candidate && { frequencyGHz: middleGHz(candidate) }), outlooks: [side(ifFirst, first), side(ifSecond, second)] };
}

/** One row per candidate: expected evidences, then the Fisher errors of the first hypothesis's parameters. */
function forecastCsv(outlooks: readonly Outlook[], first: FittedRun, second: FittedRun, seed: number): string {
  const numbers = (pick: (one: Outlook) => number): Float64Array => Float64Array.from(outlooks, pick);
  return writeCsv(
    [
      { name: 'band', type: 'string', values: outlooks.map(({ candidate }) => candidate!.name) },
      { name: 'frequency', unit: 'GHz', type: 'float64', values: numbers(({ candidate }) => middleGHz(candidate!)) },
      { name: 'deltaLnZFirst', type: 'float64', values: numbers(({ ifFirst }) => ifFirst.deltaLogEvidence), description: 'expected where the first is true' },
      { name: 'scatterFirst', type: 'float64', values: numbers(({ ifFirst }) => ifFirst.scatter) },
      { name: 'deltaLnZSecond', type: 'float64', values: numbers(({ ifSecond }) => ifSecond.deltaLogEvidence), description: 'expected where the second is true' },
      { name: 'scatterSecond', type: 'float64', values: numbers(({ ifSecond }) => ifSecond.scatter) },
      ...first.prepared.parameters.map(({ path, unit, shownUnit }, j) => ({
        name: `error ${path}`, unit: shownUnit, type: 'float64' as const, values: numbers(({ ifFirst }) => convertQuantity(ifFirst.errors[j], unit, shownUnit)),
      })),
    ],
    { first: first.prepared.name, second: second.prepared.name, version, seed },
  );
}

function middleGHz({ channels }: CandidateBand): number {
  const frequencies = channels.map(({ frequencyHz }) => frequencyHz);
  return (Math.min(...frequencies) + Math.max(...frequencies)) / 2e9;
}
