import { z } from 'zod';
import { bytesText, mostGridBytes } from '../field/grid-file.ts';
import { interpolateGrid, storedPoints } from '../math/spline-grid.ts';
import { fewestSamples } from '../math/spline-line.ts';
import type { Model, ModelFormulas } from '../model/types.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity } from '../units/quantity.ts';
import { quoteValue } from '../units/quote.ts';
import { keys, nameText, oneOf, quantity, words } from '../units/schema.ts';
import { checkYaml, placeAt, type YamlInput, type YamlPath } from '../units/yaml-input.ts';
import type { ComponentSources } from './component-sources.ts';
import { placed, readHeightLaw, type Section } from './section.ts';
import { readShape } from './shape.ts';
import type { CosmicRayLayer, GriddedFunction } from './types.ts';

const axisNames = ['x', 'y', 'z'] as const;
type Axis = (typeof axisNames)[number];

const coordinate = quantity({ unit: 'kpc', min: -1e4, max: 1e4 }, 'kpc', 'a face of the box');
const side = z.tuple([coordinate, coordinate], { error: ({ input }) => `${quoteValue(input)} is given where two coordinates such as [-8 kpc, 8 kpc] are wanted` });
const vectorFiles = z.union([words('a file'), keys({ x: words('a file'), y: words('a file'), z: words('a file') })], {
  error: ({ input }) => `${quoteValue(input)} is given where files {x: …, y: …, z: …}, or one file with the component as its first index, are wanted`,
});
const orders = ['xyz', 'xzy', 'yxz', 'yzx', 'zxy', 'zyx'] as const;

/** The keys of a component whose numbers are in files. */
export function cubeSchema(section: Section) {
  const files: z.ZodRawShape =
    section.kind === 'field'
      ? { field: vectorFiles.optional().meta({ description: 'files of B' }), potential: vectorFiles.optional().meta({ description: 'files of A, B = curl A' }) }
      : { density: words('a file').meta({ description: 'file of the density' }) };
  return keys(
    {
      model: z.literal('simulation-cube'),
      name: nameText().default('simulation-cube'),
      ...files,
      unit: words('the unit of the numbers'),
      axes: oneOf(orders, 'axes').meta({ description: 'axis of the galaxy along each index of the arrays as NumPy shows them; of FITS images NAXIS3, NAXIS2, NAXIS1' }),
      box: keys({ x: side, y: side, z: side }).meta({ description: 'outer faces of the first and the last cell' }),
      samples: oneOf(['centres', 'faces'], 'samples').default('centres').meta({ description: 'whether the outer samples lie half a cell inside the box or on its faces' }),
      periodic: z.boolean({ error: ({ input }) => `${quoteValue(input)} is given where true or false is wanted` }).default(false),
      scale: quantity({ unit: '', min: -1e6, max: 1e6 }, '', 'factor to all numbers').default(1),
      ...section.extra,
    },
  );
}

/** What `cubeSchema` gives, as far as it is the same in all sections. */
interface CubeKeys {
  readonly name: string;
  readonly field?: VectorFiles;
  readonly potential?: VectorFiles;
  readonly density?: string;
  readonly unit: string;
  readonly axes: (typeof orders)[number];
  readonly box: Readonly<Record<Axis, readonly [number, number]>>;
  readonly samples: 'centres' | 'faces';
  readonly periodic: boolean;
  readonly scale: number;
}

type VectorFiles = string | Readonly<Record<Axis, string>>;

/**
 * A field or density given on a grid of the user's own (physics.md section 4, item 8): cubic
 * B-splines through the samples, so that a field given by its potential is divergence-free exactly
 * and one given as B is as good as its samples. Throws InputError at the place of what is wrong.
 */
export function readCubeComponent(input: YamlInput, section: Section, path: YamlPath, sources: ComponentSources): CosmicRayLayer {
  const given = checkYaml(input, cubeSchema(section), path) as CubeKeys & Readonly<Record<string, unknown>>;
  const { key, names, files } = chooseFiles(input, given, section, path);
  const unit = { field: 'uG', potential: 'uG kpc', density: 'cm^-3' }[key];
  const factor = placed(input, [...path, 'unit'], () => convertQuantity(1, given.unit, unit));
  const arrays = readArrays(input, [...path, key], files, sources);
  const shape = arrays[0].shape;
  const layout = placed(input, [...path, 'box'], () => layOut(given, shape, sources.volume));
  refuseLarge(input, [...path, key], shape, names.length);
  const grids: Record<string, GriddedFunction> = {};
  names.forEach((name, k) => {
    const ends = shape.map(() => (given.periodic ? ('periodic' as const) : ('free' as const)));
    const values = factor === 1 ? arrays[k].values : arrays[k].values.map((value) => value * factor);
    const identity = `${arrays[k].sha256}/${arrays[k].part}/${given.periodic}/${factor}`;
    grids[name] = { grid: interpolateGrid(identity, values, shape, ends), panelKpc: Math.min(...layout.stepsKpc) };
  });
  const model = cubeModel(given, key, names, layout.coordinates, section);
  return { name: given.name, model, parameters: { scale: given.scale }, choices: {}, grids, ...readHeightLaw(input, path, model, given), ...readShape(input, path, model, given) };
}

function chooseFiles(input: YamlInput, { field, potential, density }: CubeKeys, section: Section, path: YamlPath): { key: 'field' | 'potential' | 'density'; names: string[]; files: VectorFiles } {
  if (section.kind === 'density') return { key: 'density', names: ['sample'], files: density ?? '' };
  if ((field === undefined) === (potential === undefined)) {
    throw new InputError('files of either "field" (B) or "potential" (A) are wanted, one of the two', placeAt(input, path));
  }
  return { key: field === undefined ? 'potential' : 'field', names: ['sampleX', 'sampleY', 'sampleZ'], files: field ?? potential ?? '' };
}

interface CubeArray {
  readonly shape: readonly number[];
  readonly values: Float32Array | Float64Array;
  readonly sha256: string;
  readonly part: number;
}

/** Arrays of three indices, equal in shape and whole: one a file, or all three parts of one file. */
function readArrays(input: YamlInput, path: YamlPath, files: VectorFiles, { open }: ComponentSources): readonly CubeArray[] {
  const isVector = path[path.length - 1] !== 'density';
  const read = (file: string, place: YamlPath, rank: number): CubeArray => placed(input, place, () => {
    const { arrays, sha256 } = open(file);
    if (arrays.length > 1) throw new InputError(`${file} holds ${arrays.length} images; one is wanted`);
    const [{ shape, values }] = arrays;
    const lean = shape.filter((n) => n > 1);
    if (lean.length !== rank) throw new InputError(`${file} is an array of ${shape.join(' x ')} numbers; ${rank} indices are wanted`);
    return { shape: lean, values, sha256, part: 0 };
  });
  if (typeof files === 'string') {
    const whole = read(files, path, isVector ? 4 : 3);
    const arrays = isVector ? splitVector(input, path, files, whole) : [whole];
    arrays.forEach((array) => placed(input, path, () => refuseUnusable(files, array)));
    return arrays;
  }
  const arrays = axisNames.map((axis) => read(files[axis], [...path, axis], 3));
  axisNames.forEach((axis, k) => placed(input, [...path, axis], () => {
    if (arrays[k].shape.join() !== arrays[0].shape.join()) throw new InputError(`${files[axis]} is an array of ${arrays[k].shape.join(' x ')} numbers, ${files.x} one of ${arrays[0].shape.join(' x ')}`);
    refuseUnusable(files[axis], arrays[k]);
  }));
  return arrays;
}

function splitVector(input: YamlInput, path: YamlPath, file: string, { shape, values, sha256 }: CubeArray): readonly CubeArray[] {
  if (shape[0] !== 3) throw new InputError(`${file} is an array of ${shape.join(' x ')} numbers; 3 components are wanted along its first index`, placeAt(input, path));
  const size = values.length / 3;
  return axisNames.map((_, part) => ({ shape: shape.slice(1), values: values.subarray(part * size, (part + 1) * size), sha256, part }));
}

function refuseUnusable(file: string, { shape, values }: CubeArray): void {
  if (shape.some((n) => n < fewestSamples)) throw new InputError(`${file} is an array of ${shape.join(' x ')} numbers; at least ${fewestSamples} along each index are wanted`);
  const bad = values.findIndex((value) => !Number.isFinite(value));
  if (bad < 0) return;
  let count = 0;
  for (const value of values) if (!Number.isFinite(value)) count++;
  const [, ny, nz] = shape;
  const index = [Math.floor(bad / (ny * nz)), Math.floor(bad / nz) % ny, bad % nz];
  throw new InputError(`${file} has ${count} of ${values.length} values that are no finite numbers, the first, ${values[bad]}, at index [${index.join(', ')}] counted from 0`);
}

function refuseLarge(input: YamlInput, path: YamlPath, shape: readonly number[], parts: number): void {
  const bytes = 4 * parts * shape.reduce((product, points) => product * storedPoints({ points, periodic: false }), 1);
  if (bytes <= mostGridBytes) return;
  throw new InputError(`${parts} x ${shape.join(' x ')} numbers need ${bytesText(bytes)} of memory in every worker; at most ${bytesText(mostGridBytes)} are allowed`, placeAt(input, path));
}

/** Formulas of where to read, one an index, and the steps between samples. */
function layOut(
  { axes, box, samples, periodic }: CubeKeys,
  shape: readonly number[],
  volume: ComponentSources['volume'],
): { coordinates: string[]; stepsKpc: number[] } {
  const places = [...axes].map((letter, index) => {
    const axis = letter as Axis;
    const [from, to] = box[axis];
    if (!(to > from)) throw new InputError(`the box reaches from ${from} kpc to ${to} kpc along ${axis}, which is empty`);
    const reach = axis === 'z' ? volume.heightKpc : volume.radiusKpc;
    if (!periodic && (from > -reach || to < reach)) {
      throw new InputError(`the box reaches from ${from} kpc to ${to} kpc along ${axis} and does not cover the scene's volume, ${-reach} kpc to ${reach} kpc: make the volume smaller, or the cube periodic`);
    }
    const cells = shape[index] - (samples === 'faces' && !periodic ? 1 : 0);
    const step = (to - from) / cells;
    const first = samples === 'faces' ? from : from + step / 2;
    return { text: `(${axis} - (${first}))/${step}`, step };
  });
  return { coordinates: places.map(({ text }) => text), stepsKpc: places.map(({ step }) => step) };
}

function cubeModel({ name }: CubeKeys, key: 'field' | 'potential' | 'density', names: readonly string[], coordinates: readonly string[], section: Section): Model {
  const scaled = (sample: string): string => `scale*${sample}`;
  const formulas: ModelFormulas = key === 'density' ? { density: scaled(names[0]) } : { [key]: Object.fromEntries(axisNames.map((axis, k) => [axis, scaled(names[k])])) };
  return {
    name: 'simulation-cube',
    kind: section.kind,
    title: `Cube "${name}"`,
    meaning: 'Numbers on a grid given in files, cubic B-splines between them.',
    source: 'files named in the scene',
    parameters: [{ name: 'scale', unit: '', range: [-1e6, 1e6], meaning: 'factor to all numbers', default: 1 }],
    choices: [],
    define: {},
    grids: Object.fromEntries(names.map((sample) => [sample, coordinates])),
    formulas,
    edges: {},
    checks: [],
  };
}
