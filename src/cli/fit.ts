import { Option, type Command } from 'commander';
import { comparisonOverview, measureOnData } from '../figure/comparison.ts';
import { withInterval } from '../figure/number-text.ts';
import { overviewSvg } from '../figure/overview.ts';
import { textTable } from '../figure/table.ts';
import { summarisePosterior } from '../infer/posterior.ts';
import type { Method } from '../infer/study-types.ts';
import { structureSentence } from '../infer/whiteness.ts';
import { convertQuantity } from '../units/quantity.ts';
import { InputError } from '../units/input-error.ts';
import { bestTexts, correlationTable, errorTexts } from './hypothesis-run.ts';
import { dryRunWords } from './nested-cluster.ts';
import { OutputFolder } from './output-folder.ts';
import { addPosteriorFiles, posteriorRecord, type SampledRun } from './posterior-files.ts';
import { durationText } from './progress.ts';
import { addRunFlags, addStudyFlags } from './rank.ts';
import { addModelMaps } from './rank-files.ts';
import { sayWords } from './run-context.ts';
import { whitenessOf, whitenessRecord } from './run-whiteness.ts';
import { loadStudy, type StudyFlags } from './study-load.ts';
import { runStudy } from './study-run.ts';

interface FitFlags extends StudyFlags {
  readonly hypothesis?: string;
  readonly method?: Exclude<Method, 'least-squares'>;
}

/** `gyrelight fit STUDY`: one hypothesis of a study in depth, with its posterior. */
export function addFit(program: Command): void {
  addRunFlags(addStudyFlags(program.command('fit <study>').description('fit one hypothesis of a study in depth: posterior, pairwise plot, predictive bands')))
    .option('--hypothesis <name>', 'which one (needed where the study has several)')
    .addOption(new Option('--method <method>', 'how the posterior is sampled (default: as the study says; walkers where it says least-squares)').choices(['walkers', 'nested']))
    .action((path: string, flags: FitFlags) => fit(path, flags));
}

async function fit(path: string, flags: FitFlags): Promise<void> {
  const loaded = loadStudy(path, flags, flags.hypothesis);
  const { study, data, ring, seed, likelihood, prepared } = loaded;
  if (prepared.length > 1) {
    throw new InputError(`the study has ${prepared.length} hypotheses; name one: ${prepared.map(({ name }) => name).join(', ')}`, { flag: '--hypothesis' });
  }
  if (prepared[0].parameters.length === 0) throw new InputError(`nothing is free in "${prepared[0].name}"; \`compare\` compares a scene with data`, { file: path });
  const method = flags.method ?? (study.method === 'least-squares' ? 'walkers' : study.method);
  if (flags.dryRun) {
    sayWords({}, ...dryRunWords(loaded, method, flags));
    return;
  }
  const { runs: [run], seconds, clear } = await runStudy(loaded, method, flags);
  const observed = measureOnData(data, run.bestScene, ring);
  const white = whitenessOf(run, data, likelihood);
  const folder = new OutputFolder(flags.out);
  const record = {
    hypothesis: run.prepared.name,
    study: path,
    method,
    seed,
    chi2: run.fit.chi2,
    dof: likelihood.residualCount - run.prepared.parameters.length,
    best: bestTexts(run.prepared, run.fit),
    errors: errorTexts(run.prepared, run.fit),
    correlations: correlationTable(run.prepared, run.fit),
    ...whitenessRecord(white),
    ...posteriorRecord(run),
  };
  folder.add('fit.json', `${JSON.stringify(record, null, 2)}\n`);
  folder.add('best.scene.yaml', run.bestProvenance.sceneText);
  folder.add('overview.svg', overviewSvg(comparisonOverview(run.prepared.name, `χ² ${run.fit.chi2.toFixed(1)} for ${record.dof} degrees of freedom`, run.bestScene, data, observed, run.measured, ring)));
  addModelMaps(folder, 'maps', run, data);
  addPosteriorFiles(folder, 'posterior', run, observed, data, seed);
  folder.write();
  clear();
  if (flags.json) process.stdout.write(`${JSON.stringify({ ...record, seconds, files: folder.names }, null, 2)}\n`);
  sayWords(flags, '', parameterTable(run), '', `${[posteriorSentence(run), white ? structureSentence(run.prepared.name, white.all) : ''].filter((sentence) => sentence !== '').join(' ')} Tables and figures: ${flags.out}/ (${durationText(seconds)})`);
}

/** Median with its 68 % of every parameter, as text. */
function parameterTable({ prepared, posterior, fit: best }: SampledRun): string {
  const summaries = posterior ? summarisePosterior(posterior) : [];
  const rows = prepared.parameters.map(({ path, unit, shownUnit }, j) => {
    const shown = (value: number): number => convertQuantity(value, unit, shownUnit);
    const [, low, median, high] = summaries[j].quantiles.map(shown);
    return [path, withInterval(median, median - low, high - median, shownUnit), withInterval(shown(best.values[j]), NaN, NaN, shownUnit)];
  });
  return textTable([{ title: 'parameter', align: 'left' }, { title: 'median, 68 %', align: 'left' }, { title: 'least squares', align: 'left' }], rows);
}

function posteriorSentence({ posterior }: SampledRun): string {
  if (!posterior) return '';
  const evidence = posterior.logEvidence ? `ln Z = ${posterior.logEvidence.value.toFixed(2)} ± ${posterior.logEvidence.error.toFixed(2)}, ` : '';
  const words = `${evidence}${posterior.effectiveSamples.toFixed(0)} independent samples from ${posterior.evaluations} models.`;
  return posterior.believable ? words : `Not to be believed yet: ${posterior.reason} ${words}`;
}
