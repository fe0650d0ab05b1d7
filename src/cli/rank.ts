import type { Command } from 'commander';
import { measureOnData } from '../figure/comparison.ts';
import { rankingTable } from '../figure/table.ts';
import { dryRunWords } from './nested-cluster.ts';
import { OutputFolder } from './output-folder.ts';
import { addRankFiles, rankRuns, rankingRecords } from './rank-files.ts';
import { durationText } from './progress.ts';
import { addClusterFlags } from './cluster-flags.ts';
import { addCommonFlags, sayWords } from './run-context.ts';
import { loadStudy, type StudyFlags } from './study-load.ts';
import { runStudy } from './study-run.ts';

/** `gyrelight rank STUDY`: fits every hypothesis of a study to its data and ranks them. */
export function addRank(program: Command): void {
  addRunFlags(addStudyFlags(program.command('rank <study>').description('fit every hypothesis of a study to its data, and rank them')))
    .action((path: string, flags: StudyFlags) => rank(path, flags));
}

/** Adds the flags of commands that fit hypotheses of a study. */
export function addStudyFlags(command: Command): Command {
  return addCommonFlags(command)
    .option('--ring <inner,outer>', 'ring of the azimuth profiles, such as "4 kpc,7 kpc" (default: a quarter to half of the volume radius)')
    .option('--starts <n>', 'starting points tried per hypothesis, beside the scene’s own values', '4')
    .option('--live <n>', 'live points of nested sampling (default: 25 a free parameter, 150 or more)')
    .option('--steps <n>', 'most steps of walkers; they end sooner where the chain can be believed', '5000')
    .option('--evaluations <n>', 'most models that nested sampling may compute per hypothesis')
    .option('--resume', 'go on where an interrupted run of the same study left off');
}

/** Adds the flags of commands whose nested sampling may be several runs, on this machine or on a cluster. */
export function addRunFlags(command: Command): Command {
  return addClusterFlags(command).option('--runs <n>', 'independent nested-sampling runs that are merged into one posterior (default 1; with --engine slurm as many as --tasks, 4 where not said)');
}

async function rank(path: string, flags: StudyFlags): Promise<void> {
  const loaded = loadStudy(path, flags);
  const { study, data, likelihood, assumptions, ring, seed } = loaded;
  if (flags.dryRun) {
    sayWords({}, ...dryRunWords(loaded, study.method, flags));
    return;
  }
  const { runs, seconds, clear } = await runStudy(loaded, study.method, flags);
  const outcome = rankRuns(runs, data, likelihood);
  const observed = measureOnData(data, outcome.ordered[0].bestScene, ring);
  const folder = new OutputFolder(flags.out);
  addRankFiles(folder, { study, studyFile: path, data, assumptions, ring, seed, outcome, observed, seconds });
  folder.write();
  clear();
  const pairs = outcome.pairs.length > 0 ? { pairs: outcome.pairs } : {};
  if (flags.json) process.stdout.write(`${JSON.stringify({ hypotheses: rankingRecords(outcome), verdict: outcome.verdict, ...pairs, seconds, files: folder.names }, null, 2)}\n`);
  sayWords(flags, '', rankingTable(outcome.rows), '', ...outcome.pairs.map(({ sentence }) => sentence), ...(outcome.pairs.length > 0 ? [''] : []));
  sayWords(flags, `${outcome.verdict} Maps, figures and report: ${flags.out}/ (${durationText(seconds)})`);
}
