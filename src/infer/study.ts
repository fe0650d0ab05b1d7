import { InputError } from '../units/input-error.ts';
import { checkVersion, checkYaml, placeAt, readYaml } from '../units/yaml-input.ts';
import type { YamlInput, YamlPath } from '../units/yaml-input.ts';
import type { z } from 'zod';
import { studySchema } from './study-schema.ts';
import type { Channel } from '../sky/types.ts';
import type { CandidateBand, DataEntry, FormulaText, FreeText, Hypothesis, OtherEntry, PlacedText, Study } from './study-types.ts';
import type { StokesQuantity } from './types.ts';

type StudyFile = z.output<typeof studySchema>;
type FileEntry = StudyFile['data'][number];
type FileHypothesis = StudyFile['hypotheses'][number];
type FilePrior = FileHypothesis['free'][string];

/**
 * Reads a study: data, hypotheses with their free parameters, method. Values whose unit depends on
 * the maps or the scene stay text with their place. Throws InputError with file:line:column.
 */
export function parseStudy(text: string, fileName: string): Study {
  const input = readYaml(text, fileName);
  checkVersion(input, 'gyrelight-study', 1);
  const file = checkYaml(input, studySchema);
  const hypotheses = file.hypotheses.map((hypothesis, k) => readHypothesis(input, hypothesis, k));
  hypotheses.forEach(({ name }, k) => {
    if (hypotheses.findIndex((other) => other.name === name) === k) return;
    throw new InputError(`two hypotheses are named "${name}"`, placeAt(input, ['hypotheses', k, 'name']));
  });
  return {
    title: file.title,
    data: file.data.flatMap((entry, k) => (isOther(entry) ? [] : [readEntry(input, entry, k)])),
    others: file.data.flatMap((entry, k) => (isOther(entry) ? [readOtherEntry(input, entry, k)] : [])),
    hypotheses,
    method: file.method,
    candidates: readCandidates(input, file.forecast),
    ...readForeground(input, file.foreground),
    turbulence: readTurbulence(input, file.turbulence),
    calibration: Object.entries(file.calibration).map(([band, prior]) => readPrior(input, ['calibration'], band, prior)),
    seed: file.seed,
  };
}

const tables = ['sources', 'sectors', 'spectrum'] as const;
/** Keys that each kind of other data takes beside its file. */
const otherKeys: Readonly<Record<OtherEntry['kind'], readonly (keyof FileEntry)[]>> = {
  map: ['noise', 'unit', 'mask', 'angleOf', 'frequency', 'width', 'beam', 'from'],
  sectors: ['ring', 'frequency', 'width', 'beam', 'from'],
  spectrum: ['width'],
  sources: ['scatter'],
};
const otherQuantities: Readonly<Record<OtherEntry['kind'], readonly string[]>> = { map: ['P', 'chi', 'RM'], sectors: ['P', 'chi', 'RM'], spectrum: ['P'], sources: ['RM'] };

function isOther({ quantity, ...entry }: FileEntry): boolean {
  return !['I', 'Q', 'U'].includes(quantity) || tables.some((table) => entry[table] !== undefined);
}

function readOtherEntry(input: YamlInput, entry: FileEntry, index: number): OtherEntry {
  const path: YamlPath = ['data', index];
  const refuse = (reason: string, key?: keyof FileEntry): never => {
    throw new InputError(reason, placeAt(input, key === undefined ? path : [...path, key]));
  };
  const given = tables.filter((table) => entry[table] !== undefined);
  if (entry.files !== undefined) refuse(`${entry.quantity} is given as one \`file\``, 'files');
  if (given.length + (entry.file === undefined ? 0 : 1) !== 1) refuse('a data entry of P, chi or RM needs one of `file`, `sectors`, `spectrum`, `sources`');
  const kind: OtherEntry['kind'] = given[0] ?? 'map';
  const quantity = otherQuantities[kind].includes(entry.quantity) ? (entry.quantity as OtherEntry['quantity']) : refuse(`\`${kind}\` hold ${otherQuantities[kind].join(', ')}, not ${entry.quantity}`, 'quantity');
  const allowed: readonly string[] = ['quantity', 'file', ...tables, ...otherKeys[kind]];
  const stray = (Object.keys(entry) as (keyof FileEntry)[]).find((key) => entry[key] !== undefined && !allowed.includes(key));
  if (stray !== undefined) refuse(`\`${stray}\` means nothing here; ${given.length === 0 ? `a map of ${quantity}` : `\`${kind}\``} takes ${otherKeys[kind].join(', ')}`, stray);
  const placed = (key: 'noise' | 'unit' | 'scatter'): PlacedText | undefined => {
    const text = entry[key];
    return text === undefined ? undefined : { text, place: placeAt(input, [...path, key]) };
  };
  const { beam, ring } = entry;
  if (ring && !(ring[0] < ring[1])) refuse('the inner radius comes first', 'ring');
  return {
    quantity, kind, file: (given.length === 0 ? entry.file : entry[given[0]])!,
    noise: placed('noise'), unit: placed('unit'), scatter: placed('scatter'),
    mask: entry.mask, angleOf: entry.angleOf, frequencyHz: entry.frequency, widthHz: entry.width,
    beam: beam && { majorArcsec: beam.major, minorArcsec: beam.minor, angle: beam.angle },
    fromHz: entry.from, ringKpc: ring, place: placeAt(input, path),
  };
}

function readEntry(input: YamlInput, entry: FileEntry, index: number): DataEntry {
  const path: YamlPath = ['data', index];
  const refuse = (reason: string, key?: keyof FileEntry): never => {
    throw new InputError(reason, placeAt(input, key === undefined ? path : [...path, key]));
  };
  const placed = (key: 'noise' | 'zeroLevel' | 'unit'): PlacedText | undefined => {
    const given = entry[key];
    return given === undefined ? undefined : { text: given, place: placeAt(input, [...path, key]) };
  };
  const { file, files, beam, noise, noiseMap, convention, angleOf } = entry;
  const quantity = entry.quantity as StokesQuantity;
  for (const key of ['from', 'ring', 'scatter'] as const) if (entry[key] !== undefined) refuse(`\`${key}\` means nothing for a map of ${quantity}`, key);
  if ((file === undefined) === (files === undefined)) refuse('a data entry needs `file`, or `files` with one per channel, and not both');
  if (noise !== undefined && noiseMap !== undefined) refuse('`noise` and `noiseMap` are both given; one is wanted', 'noiseMap');
  if (quantity === 'I' && convention !== undefined) refuse('`convention` means nothing for I; it belongs to Q and U', 'convention');
  if (quantity === 'I' && angleOf !== undefined) refuse('`angleOf` means nothing for I; it belongs to Q and U', 'angleOf');
  if (beam && beam.minor > beam.major) {
    refuse(`the beam's minor axis (${beam.minor} arcsec) is longer than its major (${beam.major} arcsec)`, 'beam');
  }
  return {
    quantity,
    files: files ?? [file!],
    noise: placed('noise'),
    noiseMap,
    frequencyHz: entry.frequency,
    widthHz: entry.width,
    beam: beam && { majorArcsec: beam.major, minorArcsec: beam.minor, angle: beam.angle },
    mask: entry.mask,
    zeroLevel: placed('zeroLevel'),
    unit: placed('unit'),
    convention,
    angleOf,
    correlationArcsec: entry.correlation,
    place: placeAt(input, path),
  };
}

function readHypothesis(input: YamlInput, { name, scene, free, tied, derived }: FileHypothesis, index: number): Hypothesis {
  const path: YamlPath = ['hypotheses', index];
  const formulas = (key: 'tied' | 'derived', entries: FileHypothesis['tied' | 'derived']): FormulaText[] =>
    Object.entries(entries).map(([target, { formula, where, ...unit }]) => ({
      name: target, formula, where, unit: 'unit' in unit ? String(unit.unit) : '', place: placeAt(input, [...path, key], target),
    }));
  const twice = Object.keys(tied).find((target) => target in free);
  if (twice !== undefined) throw new InputError(`${twice} is both free and tied; one is wanted`, placeAt(input, [...path, 'tied'], twice));
  return {
    name,
    scene,
    free: Object.entries(free).map(([parameter, prior]) => readPrior(input, [...path, 'free'], parameter, prior)),
    tied: formulas('tied', tied),
    derived: formulas('derived', derived),
    place: placeAt(input, path),
  };
}

/** A prior under the key `name` of the group at `path`. */
function readPrior(input: YamlInput, path: YamlPath, name: string, prior: FilePrior): FreeText {
  const kind = kindOf(prior);
  const pair = Array.isArray(prior) ? prior : Object.values(prior)[0] as readonly [string | number, string | number];
  const at: YamlPath = [...path, name, ...(kind === 'uniform' ? [] : [kind])];
  const placed = (k: 0 | 1): PlacedText => ({ text: String(pair[k]), place: placeAt(input, [...at, k]) });
  return { path: name, kind, values: [placed(0), placed(1)], place: placeAt(input, path, name) };
}

function kindOf(prior: FilePrior): FreeText['kind'] {
  if (Array.isArray(prior)) return 'uniform';
  return 'normal' in prior ? 'normal' : 'logUniform' in prior ? 'logUniform' : 'isotropic';
}

function readCandidates(input: YamlInput, forecast: StudyFile['forecast']): CandidateBand[] {
  if (!forecast) return [];
  const beamOf = (beam: NonNullable<typeof forecast.scan>['beam']): Pick<CandidateBand, 'beam'> =>
    beam ? { beam: { majorArcsec: beam.major, minorArcsec: beam.minor, angle: beam.angle } } : {};
  const listed = (forecast.bands ?? []).map((band, k): CandidateBand => {
    const path: YamlPath = ['forecast', 'bands', k];
    const channels = candidateChannels(band, () => {
      throw new InputError('a band needs `at: [1.4 GHz, ...]`, or `from`, `to` (above `from`) and `channels`', placeAt(input, path));
    });
    return { name: band.name ?? gigahertz(channels), channels, noise: { text: band.noise, place: placeAt(input, [...path, 'noise']) }, time: band.time, ...beamOf(band.beam) };
  });
  const { scan } = forecast;
  if (!scan) return listed;
  const scanned = Array.from({ length: scan.steps }, (_, k): CandidateBand => {
    const channels = [{ frequencyHz: scan.from * (scan.to / scan.from) ** (k / (scan.steps - 1)), widthHz: scan.width ?? 0 }];
    return { name: gigahertz(channels), channels, noise: { text: scan.noise, place: placeAt(input, ['forecast', 'scan', 'noise']) }, time: scan.time, ...beamOf(scan.beam) };
  });
  return [...listed, ...scanned];
}

type FileCandidate = NonNullable<NonNullable<StudyFile['forecast']>['bands']>[number];

function candidateChannels({ at, from, to, channels, width }: FileCandidate, refuse: () => never): Channel[] {
  if (at) return from === undefined && to === undefined && channels === undefined ? at.map((frequencyHz) => ({ frequencyHz, widthHz: width ?? 0 })) : refuse();
  if (from === undefined || to === undefined || channels === undefined || width !== undefined || !(to > from)) return refuse();
  const widthHz = (to - from) / channels;
  return Array.from({ length: channels }, (_, k) => ({ frequencyHz: from + (k + 0.5) * widthHz, widthHz }));
}

function gigahertz(channels: readonly Channel[]): string {
  const frequencies = channels.map(({ frequencyHz }) => frequencyHz);
  return `${Number(((Math.min(...frequencies) + Math.max(...frequencies)) / 2e9).toPrecision(4))} GHz`;
}

function readTurbulence(input: YamlInput, given: StudyFile['turbulence']): Study['turbulence'] {
  if (given !== 'single' && given.mean > given.realisations) {
    throw new InputError(`${given.mean} realisations in a mean are more than the ${given.realisations} that there are`, placeAt(input, ['turbulence', 'mean']));
  }
  return given;
}

function readForeground(input: YamlInput, given: StudyFile['foreground']): Pick<Study, 'foreground'> {
  if (given === 'fixed') return {};
  return { foreground: given === undefined ? 'default' : readPrior(input, [], 'foreground', given) };
}
