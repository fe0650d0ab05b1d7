import type { z } from 'zod';
import { InputError, nearestHint } from '../units/input-error.ts';
import { quoteValue } from '../units/quote.ts';
import { checkVersion, checkYaml, placeAt, readYaml } from '../units/yaml-input.ts';
import type { YamlInput, YamlPath } from '../units/yaml-input.ts';
import { mostVaried, sweepSchema } from './sweep-schema.ts';
import type { PlacedText, SweepFile, VaryText } from './types.ts';

type FileValues = z.output<typeof sweepSchema>;

/**
 * Reads a sweep. What depends on the scenes (units, ranges, which paths there are) stays text with its
 * place. Throws InputError with file:line:column.
 */
export function parseSweep(text: string, fileName: string): SweepFile {
  const input = readYaml(text, fileName);
  checkVersion(input, 'gyrelight-sweep', 1);
  const file = checkYaml(input, sweepSchema);
  const fail = (reason: string, path: YamlPath, key?: string): never => {
    throw new InputError(reason, placeAt(input, path, key));
  };
  const paths = Object.keys(file.vary);
  if (paths.length === 0 && file.scenes === undefined && file.realisations === 0) fail('nothing is varied: `vary` is empty', ['vary']);
  if (paths.length > mostVaried) fail(`${paths.length} quantities are varied; allowed: ${mostVaried}`, ['vary']);
  const { samples } = file;
  if (file.design === 'grid' && samples !== undefined) fail('`samples` means nothing for a grid, whose ranges have `steps`', [], 'samples');
  if (file.design !== 'grid' && samples === undefined) fail(`\`design: ${file.design}\` needs \`samples\`, the number of its ${file.design === 'sobol' ? 'points' : 'base samples'}`, [], 'design');
  if (file.ring && !(file.ring[0] < file.ring[1])) fail('the inner radius comes first', ['ring']);
  if (file.heatMap) {
    const { heatMap } = file;
    heatMap.forEach((path, k) => {
      if (!paths.includes(path)) fail(`${quoteValue(path)} is not varied${nearestHint(path, paths)}; varied are ${paths.join(', ')}`, ['heatMap', k]);
    });
    if (heatMap[0] === heatMap[1]) fail('a heat map needs two different quantities', ['heatMap']);
  }
  return {
    title: file.title,
    scenes: scenesOf(input, file),
    vary: paths.map((path) => readVaried(input, path, file.vary[path], file.design)),
    design: file.design,
    samples: samples ?? 0,
    seed: file.seed,
    realisations: file.realisations,
    ...(file.noise !== undefined && { noise: { text: file.noise, place: placeAt(input, ['noise']) } }),
    measures: [...new Set(file.measure)],
    maps: [...new Set(file.maps)],
    ...(file.ring && { ring: file.ring }),
    sectors: file.sectors,
    threshold: file.threshold,
    ...(file.heatMap && { heatMap: { paths: file.heatMap, place: placeAt(input, ['heatMap']) } }),
  };
}

function scenesOf(input: YamlInput, { scene, scenes }: FileValues): SweepFile['scenes'] {
  if ((scene === undefined) === (scenes === undefined)) {
    throw new InputError('a sweep needs `scene`, or `scenes` with a name for each, and not both', placeAt(input, [], scenes ? 'scenes' : undefined));
  }
  if (scene !== undefined) return [{ name: scene, file: scene, place: placeAt(input, ['scene']) }];
  const entries = Object.entries(scenes ?? {});
  if (entries.length === 0) throw new InputError('`scenes` is empty; names with scene files are wanted', placeAt(input, ['scenes']));
  return entries.map(([name, file]) => ({ name, file, place: placeAt(input, ['scenes', name]) }));
}

function readVaried(input: YamlInput, path: string, given: FileValues['vary'][string], design: FileValues['design']): VaryText {
  const at: YamlPath = ['vary', path];
  const placed = (text: string | number, key: string | number): PlacedText => ({ text: String(text), place: placeAt(input, [...at, key]) });
  const place = placeAt(input, ['vary'], path);
  if (Array.isArray(given)) return { path, place, list: given.map((one, k) => placed(one, k)) };
  const { from, to, steps, spacing } = given;
  if (design === 'grid' && steps === undefined) throw new InputError(`${path}: a range of a grid needs \`steps\``, place);
  if (design !== 'grid' && steps !== undefined) throw new InputError(`${path}: \`steps\` means nothing in \`design: ${design}\`, which has \`samples\``, placeAt(input, at, 'steps'));
  return { path, place, range: { from: placed(from, 'from'), to: placed(to, 'to'), ...(steps !== undefined && { steps }), spacing } };
}
