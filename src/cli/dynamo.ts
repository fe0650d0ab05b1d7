import type { Command } from 'commander';
import { scaleField } from '../field/dynamo/meridional-field.ts';
import { meridionalSvg } from '../figure/meridional-plane.ts';
import { meanFieldFits } from '../files/mean-field-fits.ts';
import { sha256OfText } from '../files/sha256.ts';
import { loadDynamo, solveUnderWatch, thinDiscRates } from './dynamo-run.ts';
import { dynamoSummary, fieldSentences, modeTable, thinDiscTable } from './dynamo-words.ts';
import { OutputFolder } from './output-folder.ts';
import { addOutputFlags, addSetFlag, sayWords, type CommonFlags } from './run-context.ts';

/** `gyrelight dynamo SPEC`: solves the mean-field equations and writes a field that scenes use. */
export function addDynamo(program: Command): void {
  const command = program.command('dynamo <spec>').description('solve the mean-field dynamo of a rotating disc with halo and wind; writes a field file for scenes');
  addOutputFlags(addSetFlag(command, 'file', 'wind.speed="200 km/s"')).action(async (path: string, flags: CommonFlags) => {
    const { spec, provenance } = loadDynamo(path, flags);
    const started = Date.now();
    const solution = await solveUnderWatch(spec, path, flags);
    const local = thinDiscRates(spec);
    const field = solution.state === 'mode' ? scaleField(solution.field, spec.strengthUG) : solution.field;
    const sentences = fieldSentences(solution, field);
    const folder = new OutputFolder(flags.out);
    folder.add('field.fits', meanFieldFits(field, { parity: solution.parity, state: solution.state }, provenance));
    folder.add('overview.svg', meridionalSvg(field, spec.title || 'Mean-field dynamo', sentences));
    const summary = {
      ...dynamoSummary(spec, solution, field, local),
      version: provenance.version,
      specSha256: sha256OfText(provenance.sceneText),
      seconds: (Date.now() - started) / 1000,
      files: [...folder.names, 'summary.json'],
    };
    const text = `${JSON.stringify(summary, null, 2)}\n`;
    folder.add('summary.json', text);
    folder.write();
    if (flags.json) process.stdout.write(text);
    sayWords(flags, ...spec.notes, ...modeTable(solution), ...thinDiscTable(local), ...sentences, `Field: ${flags.out}/field.fits`);
  });
}
