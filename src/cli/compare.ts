import type { Command } from 'commander';
import { comparisonOverview, measureOnData } from '../figure/comparison.ts';
import { overviewSvg } from '../figure/overview.ts';
import { filesBeside, readBytes, readText } from '../files/node-io.ts';
import { loadData } from '../files/load-data.ts';
import { readFits } from '../files/fits-read.ts';
import { skyImageFromFits } from '../files/sky-fits-read.ts';
import { writeCsv } from '../files/csv-write.ts';
import { mapFits } from '../files/sky-fits-write.ts';
import { makeLikelihood, chiSquared, logLikelihood } from '../infer/likelihood.ts';
import { refuseNoOverlap } from '../infer/overlap.ts';
import { informationCriteria } from '../infer/rank.ts';
import { makeSkyModel } from '../infer/sky-model.ts';
import { parseStudy } from '../infer/study.ts';
import type { DataEntry } from '../infer/study-types.ts';
import type { DataSet } from '../infer/types.ts';
import type { Sector } from '../measure/rings.ts';
import { InputError } from '../units/input-error.ts';
import { gatherAssumptions } from './assumptions.ts';
import { loadScene } from './load-scene.ts';
import { bandFileName, OutputFolder } from './output-folder.ts';
import { ringOf } from './ring-flag.ts';
import { addCommonFlags, overridesOf, sayWords, withRunContext, type CommonFlags } from './run-context.ts';
import { version } from '../files/version.ts';

interface CompareFlags extends CommonFlags {
  readonly ring?: string;
  readonly noise?: string;
  readonly convention?: 'IAU' | 'U-reversed';
}

/** `gyrelight compare SCENE DATA…`: residuals, χ² and profiles of a scene against data. */
export function addCompare(program: Command): void {
  addCommonFlags(program.command('compare <scene> <data...>').description('residuals, chi2 and profiles of a scene against maps (FITS files, or a study whose data are taken)'))
    .option('--ring <inner,outer>', 'ring of the azimuth profiles, such as "4 kpc,7 kpc"')
    .option('--noise <rms>', 'noise of FITS maps whose header states none, such as "20 uJy/beam"')
    .option('--convention <signs>', 'signs of Q and U in FITS maps: IAU or U-reversed')
    .action((path: string, files: readonly string[], flags: CompareFlags) => compare(path, files, flags));
}

async function compare(path: string, files: readonly string[], flags: CompareFlags): Promise<void> {
  const { scene, provenance } = loadScene(path, overridesOf(flags));
  const { data, notes } = readData(files, flags);
  refuseNoOverlap(data, scene.galaxy);
  const ring = ringOf(flags.ring, scene);
  const assumptions = [...data.assumptions, ...notes];
  sayWords(flags, ...gatherAssumptions(assumptions).map((sentence) => `assumed  ${sentence}`));
  const likelihood = makeLikelihood(data);
  const planes = await withRunContext(flags, ({ pool, signal, progress }) => {
    progress.show('following rays', 0, 1);
    return makeSkyModel(data, scene, () => scene, pool.backend)(new Float64Array(0), signal);
  });
  const residuals = likelihood.residuals(planes);
  const chi2 = chiSquared(residuals);
  const { aic, bic } = informationCriteria(logLikelihood(likelihood, residuals), 0, likelihood.count);
  const summary = { title: scene.title, version, seed: provenance.seed, chi2, dof: residuals.length, aic, bic, assumed: assumptions };

  const observed = measureOnData(data, scene, ring);
  const model = measureOnData(data, scene, ring, planes);
  const folder = new OutputFolder(flags.out);
  data.planes.forEach((plane, k) => {
    const band = data.bands[plane.band];
    const channel = band.channels[plane.channel];
    const name = band.channels.length > 1 ? `${plane.quantity}-${bandFileName(band.name)}-${plane.channel + 1}` : `${plane.quantity}-${bandFileName(band.name)}`;
    const about = { unit: data.unit, sky: { nx: data.axes.nx, ny: data.axes.ny, wcs: data.axes.wcs }, band: band.name, frequencyHz: channel.frequencyHz, ...(band.beam && { beam: band.beam }) };
    const residual = planes[k].map((value, pixel) => plane.values[pixel] - value);
    folder.add(`model-${name}.fits`, mapFits({ ...about, quantity: plane.quantity, values: planes[k] }, provenance, 32));
    folder.add(`residual-${name}.fits`, mapFits({ ...about, quantity: `${plane.quantity} residual`, values: residual, comments: ['Data less model.'] }, provenance, 32));
  });
  folder.add('profiles.csv', profilesCsv(data, observed, model));
  const subtitle = `χ²/N ${(chi2 / residuals.length).toFixed(2)}`;
  folder.add('overview.svg', overviewSvg(comparisonOverview(scene.title, subtitle, scene, data, observed, model, ring)));
  const text = `${JSON.stringify({ ...summary, files: folder.names }, null, 2)}\n`;
  folder.add('comparison.json', text);
  folder.write();
  if (flags.json) process.stdout.write(text);
  sayWords(flags, `χ² ${chi2.toFixed(1)} for ${residuals.length} independent values (χ²/N ${(chi2 / residuals.length).toFixed(2)})`, `Residuals and profiles: ${flags.out}/`);
}

/** Data from FITS files whose headers say what they are, or from a study. */
function readData(files: readonly string[], flags: CompareFlags): ReturnType<typeof loadData> {
  if (files.length === 1 && /\.ya?ml$/i.test(files[0])) return loadData(parseStudy(readText(files[0]), files[0]).data, filesBeside(files[0]));
  return loadData(files.flatMap((file) => entriesOf(file, flags)), filesBeside('./'));
}

/** One entry per Stokes plane of a file that can be compared. */
function entriesOf(file: string, { noise, convention }: CompareFlags): readonly DataEntry[] {
  const image = skyImageFromFits(readFits(readBytes(file), file), file);
  const stokes = image.stokes.filter((name): name is 'I' | 'Q' | 'U' => name !== 'V');
  if (stokes.length === 0) {
    throw new InputError('the header does not say which Stokes parameter this is; name it in the data of a study and give that file instead', { file });
  }
  const stated = image.noise?.[0];
  const noiseText = noise ?? (stated !== undefined && stated > 0 ? `${stated} ${image.unit}` : undefined);
  if (noiseText === undefined) throw new InputError('no noise is stated; give --noise "20 uJy/beam" (or what it is)', { file });
  return stokes.map((quantity): DataEntry => ({
    quantity,
    files: [file],
    noise: { text: noiseText, place: noise === undefined ? { file } : { flag: `--noise ${noise}` } },
    ...(convention && { convention }),
    place: { file },
  }));
}

/** Sectors of every band, data and model beside each other. */
function profilesCsv(data: DataSet, observed: ReturnType<typeof measureOnData>, model: ReturnType<typeof measureOnData>): string {
  const rows = observed.bands.flatMap((band, k) => {
    const modelled = model.bands[k].profile;
    return (band.profile?.sectors ?? []).map((sector, j) => ({ band, sector, modelled: modelled?.sectors[j] }));
  });
  const column = (pick: (row: (typeof rows)[number]) => number): number[] => rows.map(pick);
  const rm = (sector: Sector | undefined): number => sector?.rm?.value ?? NaN;
  return writeCsv([
    { name: 'band', type: 'string', values: rows.map(({ band }) => band.name) },
    { name: 'frequency', unit: 'Hz', type: 'float64', values: column(({ band }) => band.centre.frequencyHz) },
    { name: 'azimuth', unit: 'deg', type: 'float64', values: column(({ sector }) => (sector.azimuth * 180) / Math.PI), description: 'galaxy azimuth, 0 on the receding half' },
    { name: 'P', unit: data.unit, type: 'float64', values: column(({ sector }) => sector.P.value) },
    { name: 'P_error', unit: data.unit, type: 'float64', values: column(({ sector }) => sector.P.error) },
    { name: 'P_model', unit: data.unit, type: 'float64', values: column(({ modelled }) => modelled?.P.value ?? NaN) },
    { name: 'RM', unit: 'rad/m2', type: 'float64', values: column(({ sector }) => rm(sector)) },
    { name: 'RM_error', unit: 'rad/m2', type: 'float64', values: column(({ sector }) => sector.rm?.error ?? NaN) },
    { name: 'RM_model', unit: 'rad/m2', type: 'float64', values: column(({ modelled }) => rm(modelled)) },
  ]);
}
