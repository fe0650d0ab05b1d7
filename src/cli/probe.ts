import type { Command } from 'commander';
import { csvNumbers, parseCsv } from '../files/csv-parse.ts';
import { writeCsv, type CsvColumn } from '../files/csv-write.ts';
import { readText, writeWhole } from '../files/node-io.ts';
import { sha256OfText } from '../files/sha256.ts';
import { probeScene, type Probe } from '../ray/probe.ts';
import { InputError } from '../units/input-error.ts';
import { loadScene } from './load-scene.ts';
import { addSceneFlags, overridesOf, sayWords, type CommonFlags } from './run-context.ts';

interface ProbeFlags extends CommonFlags {
  readonly points: string;
  readonly table?: string;
}

const columns: readonly { readonly name: keyof Probe; readonly unit: string; readonly description: string }[] = [
  { name: 'x', unit: 'kpc', description: 'towards the receding half of the line of nodes' },
  { name: 'y', unit: 'kpc', description: 'a quarter turn further in the sense of rotation' },
  { name: 'z', unit: 'kpc', description: 'along the spin' },
  { name: 'Bx', unit: 'uG', description: 'field' },
  { name: 'By', unit: 'uG', description: 'field' },
  { name: 'Bz', unit: 'uG', description: 'field' },
  { name: 'ne', unit: 'cm-3', description: 'thermal electrons' },
  { name: 'C', unit: 'cm-3', description: 'cosmic-ray electrons per unit gamma^-p' },
  { name: 'divB', unit: 'uG/kpc', description: 'divergence of the field' },
];

/** `gyrelight probe SCENE --points FILE [--table FILE]`: fields and densities at points. */
export function addProbe(program: Command): void {
  addSceneFlags(program.command('probe <scene>').description('fields and densities of a scene at points (columns x, y, z in kpc, galaxy frame)'))
    .requiredOption('--points <file>', 'CSV with columns x, y, z')
    .option('--table <file>', 'CSV to write (default: standard output)')
    .option('--quiet', 'no words, errors only')
    .action((path: string, flags: ProbeFlags) => {
      const { scene, provenance } = loadScene(path, overridesOf(flags));
      const table = parseCsv(readText(flags.points), flags.points);
      const [x, y, z] = ['x', 'y', 'z'].map((name) => csvNumbers(table, name));
      const bad = [x, y, z].findIndex((column) => column.some((value) => !Number.isFinite(value)));
      if (bad >= 0) throw new InputError(`column "${'xyz'[bad]}" has a value that is no finite number`, { file: flags.points });
      const probe = probeScene(scene, { x, y, z });
      const text = writeCsv(
        columns.map(({ name, ...about }): CsvColumn => ({ ...about, name, type: 'float64', values: probe[name] })),
        { scene: scene.title, version: provenance.version, sceneSha256: sha256OfText(provenance.sceneText) },
      );
      if (flags.table === undefined) process.stdout.write(text);
      else {
        writeWhole(flags.table, text);
        const largest = probe.relativeDivergence.reduce((most, value) => Math.max(most, value), 0);
        sayWords(flags, `${x.length} points: ${flags.table}; largest |div B|/|grad B| ${largest.toExponential(1)}`);
      }
    });
}
