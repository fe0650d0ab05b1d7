import type { Command } from 'commander';
import { readText } from '../files/node-io.ts';
import { rankingTable } from '../figure/table.ts';
import { makeLikelihood } from '../infer/likelihood.ts';
import { parseStudy } from '../infer/study.ts';
import { measureOnData } from '../figure/comparison.ts';
import { InputError } from '../units/input-error.ts';
import { gatherAssumptions } from './assumptions.ts';
import { FitStore } from './fit-store.ts';
import { finishHypothesis, fitHypothesis, fitKey, prepareHypothesis, type FittedRun } from './hypothesis-run.ts';
import { loadData } from './load-data.ts';
import { OutputFolder } from './output-folder.ts';
import { addRankFiles, rankRuns, rankingRecords } from './rank-files.ts';
import { ringOf } from './ring-flag.ts';
import { durationText } from './progress.ts';
import { addCommonFlags, overridesOf, sayWords, withRunContext, type CommonFlags } from './run-context.ts';

interface RankFlags extends CommonFlags {
  readonly resume?: boolean;
  readonly ring?: string;
  readonly starts: string;
}

/** `gyrelight rank STUDY`: fits every hypothesis of a study to its data and ranks them. */
export function addRank(program: Command): void {
  addCommonFlags(program.command('rank <study>').description('fit every hypothesis of a study to its data, and rank them'))
    .option('--ring <inner,outer>', 'ring of the azimuth profiles, such as "4 kpc,7 kpc" (default: a quarter to half of the volume radius)')
    .option('--starts <n>', 'starting points tried per hypothesis, beside the scene’s own values', '4')
    .option('--resume', 'keep the fits that an interrupted run has finished')
    .action((path: string, flags: RankFlags) => rank(path, flags));
}

async function rank(path: string, flags: RankFlags): Promise<void> {
  const text = readText(path);
  const study = parseStudy(text, path);
  const { data, notes } = loadData(study.data, path);
  const overrides = overridesOf({ set: flags.set });
  const seed = flags.seed ?? study.seed;
  const prepared = study.hypotheses.map((hypothesis) => prepareHypothesis(hypothesis, study, path, data, overrides));
  const ring = ringOf(flags.ring, prepared[0].scene);
  const effort = { starts: startsOf(flags.starts), descents: 2 };
  const likelihood = makeLikelihood(data);
  const assumptions = [...data.assumptions, ...notes];
  sayWords(flags, ...gatherAssumptions(assumptions).map((sentence) => `assumed  ${sentence}`));

  const started = Date.now();
  const store = new FitStore(flags.out);
  const runs = await withRunContext(flags, async (context) => {
    const done: FittedRun[] = [];
    for (const [k, hypothesis] of prepared.entries()) {
      const key = fitKey(text, hypothesis, data, effort);
      const label = `fitting ${hypothesis.name} (${k + 1} of ${prepared.length})`;
      const known = flags.resume ? store.find(key) : undefined;
      const fit = await fitHypothesis(hypothesis, data, likelihood, seed, effort, context, label, known);
      store.keep(key, fit);
      done.push(await finishHypothesis(hypothesis, fit, data, ring, context));
    }
    return done;
  });
  const seconds = (Date.now() - started) / 1000;

  const outcome = rankRuns(runs, data, likelihood);
  const observed = measureOnData(data, outcome.ordered[0].bestScene, ring);
  const folder = new OutputFolder(flags.out);
  addRankFiles(folder, { study, studyFile: path, data, assumptions, ring, seed, outcome, observed, seconds });
  folder.write();
  store.clear();
  if (flags.json) process.stdout.write(`${JSON.stringify({ hypotheses: rankingRecords(outcome), verdict: outcome.verdict, seconds, files: folder.names }, null, 2)}\n`);
  sayWords(flags, '', rankingTable(outcome.rows), '', `${outcome.verdict} Maps, figures and report: ${flags.out}/ (${durationText(seconds)})`);
}

function startsOf(text: string): number {
  const value = Number(text);
  if (/^\d+$/.test(text) && value <= 10_000) return value;
  throw new InputError('expected a whole number from 0 to 10000', { flag: `--starts ${text}` });
}
