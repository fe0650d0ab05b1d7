import type { Command } from 'commander';
import { filesBeside, readText } from '../files/node-io.ts';
import { loadData } from '../files/load-data.ts';
import { parseStudy } from '../infer/study.ts';
import { checkModel } from '../model/check-model.ts';
import { parseModelFile } from '../model/model-file.ts';
import { largestReturnField, measureDivergence } from '../ray/probe.ts';
import { symmetrySentences } from '../ray/symmetry.ts';
import { bytesText } from '../field/grid-file.ts';
import { storedPoints } from '../math/spline-grid.ts';
import { findSplit } from '../scene/resolved-turbulence.ts';
import type { Component, Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity, formatQuantity } from '../units/quantity.ts';
import { readYaml } from '../units/yaml-input.ts';
import { internalUnit } from '../model/parameters.ts';
import { gatherAssumptions } from './assumptions.ts';
import { physicsLines, shapeLines } from './check-physics.ts';
import { prepareHypothesis } from './hypothesis-run.ts';
import { loadDynamo } from './dynamo-run.ts';
import { profileLines } from './dynamo-words.ts';
import { loadScene } from './load-scene.ts';
import { addSceneFlags, overridesOf, type CommonFlags } from './run-context.ts';

/** Divergences above this are worth a warning. */
const warnDivergence = 1e-3;

/** `gyrelight check FILE…`: validates scenes, models, studies and dynamos and says what they hold. */
export function addCheck(program: Command): void {
  addSceneFlags(program.command('check <files...>').description('validate scenes, models, studies and dynamos; show div B, ranges, sources and what symmetry forbids'))
    .option('--json', 'machine-readable')
    .action((files: readonly string[], flags: CommonFlags) => {
      const reports = files.map((file) => checkFile(file, flags));
      if (flags.json) process.stdout.write(`${JSON.stringify(reports, null, 2)}\n`);
      else for (const { lines } of reports) process.stdout.write(`${lines.join('\n')}\n`);
    });
}

interface CheckReport {
  readonly file: string;
  readonly kind: 'scene' | 'model' | 'study' | 'dynamo';
  readonly lines: readonly string[];
}

function checkFile(file: string, flags: CommonFlags): CheckReport {
  const text = readText(file);
  const top = readYaml(text, file).document;
  if (top.has('gyrelight-study')) return checkStudy(file, text, flags);
  if (top.has('gyrelight-dynamo')) return checkDynamo(file, flags);
  if (top.has('kind') && top.has('name')) return checkModelFile(file, text);
  if (top.has('gyrelight')) return checkScene(file, flags);
  throw new InputError('this is no scene (gyrelight: 1), study (gyrelight-study: 1), dynamo (gyrelight-dynamo: 1) or model (name, kind)', { file, line: 1 });
}

function checkDynamo(file: string, flags: CommonFlags): CheckReport {
  const { spec } = loadDynamo(file, flags);
  return { file, kind: 'dynamo', lines: [`${file}: a dynamo, "${spec.title}"`, ...profileLines(spec), ...spec.notes.map((note) => `  note     ${note}`)] };
}

function checkScene(file: string, flags: CommonFlags): CheckReport {
  const { scene } = loadScene(file, overridesOf(flags));
  const lines = [`${file}: a scene, "${scene.title}"`];
  for (const { name, byConstruction, largest, at } of measureDivergence(scene)) {
    const how = byConstruction ? 'divergence-free by construction' : largest > warnDivergence ? 'WARNING: not divergence-free' : 'measured';
    const where = largest > warnDivergence ? ` at x, y, z = ${at.map((value) => value.toFixed(2)).join(', ')} kpc` : '';
    lines.push(`  div B    ${name}: largest |div B|/|grad B| ${largest.toExponential(1)}${where} (${how})`);
  }
  for (const { name, largestUG, radiusKpc } of largestReturnField(scene)) {
    lines.push(`  plane    ${name}: its flux returns in the plane with |B_r| up to ${largestUG.toPrecision(3)} uG, at r = ${radiusKpc.toPrecision(3)} kpc`);
  }
  lines.push(...turbulenceLines(scene), ...physicsLines(scene));
  for (const { file: input, sha256 } of scene.inputs ?? []) lines.push(`  file     ${input}: SHA-256 ${sha256}`);
  for (const sentence of symmetrySentences(scene)) lines.push(`  symmetry ${sentence}`);
  lines.push(...componentLines('field', scene.field), ...componentLines('thermal electrons', scene.thermalElectrons), ...componentLines('cosmic rays', scene.cosmicRays.layers));
  lines.push(...observationLines(scene));
  return { file, kind: 'scene', lines };
}

/** What of the turbulence is drawn, and what is left to the unresolved terms. */
function turbulenceLines(scene: Scene): string[] {
  const split = findSplit(scene);
  const { resolved } = scene.turbulence;
  if (!split || !resolved) return [];
  const percent = (share: number): string => `${(100 * share).toPrecision(3)}%`;
  return [
    `  turbulence: waves of ${resolved.outerScaleKpc} to ${split.shortestKpc.toPrecision(3)} kpc are drawn, ${percent(1 - split.share)} of the variance, rms ${split.resolvedUG.toPrecision(3)} uG;` +
      ` the rest is unresolved, rms ${split.restUG.toPrecision(3)} uG in cells of ${(1000 * split.restCellKpc).toPrecision(3)} pc`,
    `    realisation ${resolved.realisation} of seed ${scene.numerics.seed}, ${resolved.cells} cells in ${resolved.boxKpc} kpc along each axis, repeated; ${bytesText(gridBytes(resolved.cells, resolved.electrons ? 4 : 3))} in every worker`,
  ];
}

function gridBytes(cells: number, grids: number): number {
  return 4 * grids * storedPoints({ points: cells, periodic: true }) ** 3;
}

function componentLines(section: string, components: readonly Component[]): string[] {
  return components.flatMap((component) => {
    const { name, model, parameters, choices } = component;
    const head = `  ${section}: ${name} (${model.name}); source: ${model.source}`;
    const values = model.parameters.map((parameter) => {
      const shown = convertQuantity(parameters[parameter.name], internalUnit(parameter), parameter.unit);
      const range = `${parameter.range[0]} to ${parameter.range[1]}`;
      return `    ${parameter.name} = ${formatQuantity(shown, parameter.unit)} (allowed ${range}): ${parameter.meaning}`;
    });
    return [head, ...values, ...Object.entries(choices).map(([choice, option]) => `    ${choice} = ${option}`), ...shapeLines(component)];
  });
}

function observationLines({ observation }: Scene): string[] {
  const { image, bands, beam } = observation;
  const names = bands.map((band) => `${band.name} (${band.channels.length} channel${band.channels.length === 1 ? '' : 's'})`).join(', ');
  const seen = beam ? `beam ${beam.majorArcsec.toPrecision(4)} x ${beam.minorArcsec.toPrecision(4)} arcsec` : 'no beam';
  return [`  observation: ${image.nx} x ${image.ny} pixels of ${image.pixelArcsec.toPrecision(4)} arcsec; bands ${names}; ${seen}`];
}

function checkModelFile(file: string, text: string): CheckReport {
  const model = parseModelFile(text, file);
  const values = checkModel(model);
  const wrong = values.find(({ relativeError }) => !(relativeError < 1e-9));
  if (wrong) {
    throw new InputError(
      `the check at ${wrong.check.at.join(', ')} kpc gives ${wrong.given.map((value) => value.toPrecision(12)).join(', ')}, the file says ${wrong.expected.join(', ')}`,
      { file },
    );
  }
  const worst = Math.max(...values.map(({ relativeError }) => relativeError));
  const lines = [
    `${file}: a ${model.kind} model, "${model.title}"; source: ${model.source}`,
    `  ${values.length} check values agree, the worst to ${worst.toExponential(1)}`,
    ...model.parameters.map(({ name, unit, range, meaning }) => `  ${name}: ${range[0]} to ${range[1]} ${unit}: ${meaning}`),
  ];
  return { file, kind: 'model', lines };
}

function checkStudy(file: string, text: string, flags: CommonFlags): CheckReport {
  const study = parseStudy(text, file);
  const { data, notes } = loadData(study.data, filesBeside(file), study.others);
  const lines = [`${file}: a study, "${study.title}"`];
  for (const band of data.bands) lines.push(`  data     ${band.name}: ${band.channels.map((channel) => `${(channel.frequencyHz / 1e9).toPrecision(6)} GHz`).join(', ')}`);
  for (const sentence of gatherAssumptions([...data.assumptions, ...notes])) lines.push(`  assumed  ${sentence}`);
  for (const hypothesis of study.hypotheses) {
    const { name, scene, parameters } = prepareHypothesis(hypothesis, study, file, data, overridesOf({ set: flags.set }));
    const free = parameters.map(({ path }) => path).join(', ');
    lines.push(`  hypothesis "${name}": ${parameters.length} free${free ? ` (${free})` : ''}; ${symmetrySentences(scene).join(' ')}`);
  }
  return { file, kind: 'study', lines };
}
