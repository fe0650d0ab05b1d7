import type { InputFile } from '../scene/types.ts';
import { escapeLines, unescapeLines } from './escape-lines.ts';
import { asciiText } from './fits-card-write.ts';
import { findNumber, findString } from './fits-header.ts';
import { makeTable, tableTexts } from './fits-table.ts';
import type { Card, FitsHdu, FitsPlace, TableHdu } from './fits-types.ts';
import { fitsError, fitsPlace } from './fits-types.ts';
import { sha256OfText } from './sha256.ts';

const TABLE_NAME = 'SCENE';
const COLUMN_NAME = 'LINE';

/** From what an output was made: it can be made again from this alone. */
export interface Provenance {
  /** The whole scene file with every change made to it on the command line. */
  readonly sceneText: string;
  /** Of the program. */
  readonly version: string;
  readonly seed: number;
  /** Files that the scene names, as they stood; none where absent. */
  readonly inputs?: readonly InputFile[];
}

/** The SCENE table of an output file: the scene line by line, version, seed and SHA-256 of the text. */
export function sceneTable(provenance: Provenance): TableHdu {
  const comment =
    'The scene from which this file was made, one line a row: it can be made again from this table alone. ' +
    '\\\\ is a backslash, \\uXXXX a UTF-16 code unit in hexadecimal, and a row that ends in a single \\ goes on in the next.';
  const cards: Card[] = [
    { keyword: 'CREATOR', value: `gyrelight ${asciiText(provenance.version)}`, comment: 'program and version' },
    { keyword: 'SEED', value: provenance.seed, comment: 'of all random streams' },
    { keyword: 'SHA256', value: sha256OfText(provenance.sceneText) },
    ...(provenance.inputs ?? []).flatMap(({ file, sha256 }, k): Card[] => [
      { keyword: `INFILE${k + 1}`, value: asciiText(file), comment: 'a file that the scene names' },
      { keyword: `INSHA${k + 1}`, value: sha256 },
    ]),
    { keyword: 'COMMENT', comment },
  ];
  return makeTable(TABLE_NAME, [{ name: COLUMN_NAME, texts: escapeLines(provenance.sceneText) }], cards);
}

/**
 * The scene that a file carries, undefined where it has no SCENE table. Throws InputError where the
 * table is not whole or its text does not have the SHA-256 stated beside it.
 */
export function findProvenance(hdus: readonly FitsHdu[], fileName: string): Provenance | undefined {
  const index = hdus.findIndex((hdu) => hdu.kind === 'table' && hdu.name === TABLE_NAME);
  const table = hdus[index];
  if (table?.kind !== 'table') return undefined;
  const place = fitsPlace(fileName, index, table.name);
  const sceneText = unescapeLines(tableTexts(table, COLUMN_NAME, place));
  if (sceneText === undefined) throw fitsError(place, `column ${COLUMN_NAME} holds escapes that are not understood`);
  const stated = required(findString(table.cards, 'SHA256', place), 'SHA256', place);
  const actual = sha256OfText(sceneText);
  if (stated !== actual) {
    throw fitsError(place, `SHA256 = '${stated}', but the text has ${actual}: it was changed or damaged`);
  }
  const creator = required(findString(table.cards, 'CREATOR', place), 'CREATOR', place);
  const seed = required(findNumber(table.cards, 'SEED', place), 'SEED', place);
  const inputs = inputsOf(table.cards, place);
  return { sceneText, version: creator.replace(/^gyrelight /, ''), seed, ...(inputs.length > 0 && { inputs }) };
}

function inputsOf(cards: readonly Card[], place: FitsPlace): InputFile[] {
  const inputs: InputFile[] = [];
  for (;;) {
    const file = findString(cards, `INFILE${inputs.length + 1}`, place);
    if (file === undefined) return inputs;
    const keyword = `INSHA${inputs.length + 1}`;
    inputs.push({ file, sha256: required(findString(cards, keyword, place), keyword, place) });
  }
}

function required<Value>(value: Value | undefined, keyword: string, place: FitsPlace): Value {
  if (value === undefined) throw fitsError(place, `${keyword} is missing from the scene's table`);
  return value;
}
