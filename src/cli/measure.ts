import type { Command } from 'commander';
import { Option } from 'commander';
import type { Provenance } from '../files/fits-scene.ts';
import { mapFits } from '../files/sky-fits-write.ts';
import { readBytes } from '../files/node-io.ts';
import { readFits } from '../files/fits-read.ts';
import { skyImageFromFits } from '../files/sky-fits-read.ts';
import { sameGrid } from '../infer/map-facts.ts';
import { lawMaps } from '../infer/law-maps.ts';
import { pixelsPerBeam, type DiscOrientation } from '../measure/disc.ts';
import { laws } from '../measure/laws/index.ts';
import { makeLayout, type Layout } from '../measure/layout.ts';
import type { RegionMean } from '../measure/region.ts';
import { regionSpectrum, thermalShare, type SpectrumOptions } from '../measure/region-spectrum.ts';
import type { DepthMaps } from '../sky/depth-maps.ts';
import { planDepths, type DepthPlan } from '../sky/depth-spectrum.ts';
import { makeDepthTransform } from '../sky/depth-transform.ts';
import { inDegrees } from '../sky/derived.ts';
import { arcsec } from '../sky/grid.ts';
import { InputError } from '../units/input-error.ts';
import { addDepthFiles, findDepths, largeDepths, peakBand } from './measure-depths.ts';
import { depthRange, flagBeam, flagList, flagNumber, flagQuantity, lawsOf, oneOrMore, orientationOf, originScene, type MeasureFlags } from './measure-flags.ts';
import { openLargeMaps, readMaps, type LargeMaps, type MapData } from './measure-input.ts';
import { lawPlot, profilePlot, rotationPlot, spectrumPlot } from './measure-plots.ts';
import { changeOfGradient, fieldPitches, fitRegionLaws, measureBand, regionRotation, ringHarmonics, type MeasuredBand, type RegionLaws } from './measure-run.ts';
import { originCsv } from './measure-origin.ts';
import { measureSummary } from './measure-summary.ts';
import { lawsCsv, profilesCsv } from './measure-tables.ts';
import { OutputFolder } from './output-folder.ts';
import { makeProgress } from './progress.ts';
import { Cancelled, sayWords } from './run-context.ts';
import { version } from './version.ts';

/** `gyrelight measure MAPS…`: rings, harmonics, Faraday spectra and laws of depolarization of any maps. */
export function addMeasure(program: Command): void {
  program
    .command('measure <maps...>')
    .description('rings, harmonics, Faraday spectra and laws of depolarization of any maps: FITS files of Q and U, and I (Q=file where the header does not say which, file@1.4GHz its frequency)')
    .option('--galaxy <scene>', 'how the galaxy lies, from a scene')
    .option('--inclination <angle>', 'angle between the spin and the line of sight, 0 to 180 deg (gyrelight orient helps)')
    .option('--position-angle <angle>', 'of the receding half of the major axis, north through east')
    .option('--centre <ra,dec>', 'such as "150 deg,20 deg" (default: the reference point of the maps)')
    .option('--distance <length>', 'such as "10 Mpc"')
    .option('--frequency <frequency>', 'of maps whose headers state none; one per channel, parted by commas, for a cube')
    .option('--width <frequency>', 'channel width')
    .option('--beam <beam>', 'of maps whose headers state none: "15 arcsec" or "15 arcsec,12 arcsec,30 deg"')
    .option('--smooth <beam>', 'bring all maps to this beam (default: the smallest round one that all allow, where they differ)')
    .option('--noise <rms>', 'of Q, U and I per channel, such as "20 uJy/beam"')
    .addOption(new Option('--convention <signs>', 'signs of Q and U').choices(['IAU', 'U-reversed']))
    .option('--radii <edges>', 'edges of the rings, such as "2 kpc,4 kpc,6 kpc" (default: four rings out to the edge of the map or the volume)')
    .option('--sectors <n>', 'sectors of a ring', '24')
    .option('--first-sector <angle>', 'galaxy azimuth on which the first sector is centred', '0 deg')
    .option('--depths <from,to,step>', 'Faraday depths of the spectrum, such as "-500 rad/m^2,500 rad/m^2,5 rad/m^2"')
    .addOption(new Option('--weights <kind>', 'of channels in the Faraday spectrum').choices(['equal', 'noise']).default('equal'))
    .option('--spectral-index <alpha>', 'of the synchrotron emission, I ~ nu^-alpha', '0.9')
    .option('--threshold <sigmas>', 'peaks below so many times the noise of the spectrum are blank', '5')
    .option('--deconvolve', 'deconvolve the Faraday spectra before peaks and moments are taken')
    .option('--thermal-fraction <share>', 'thermal share of I, a number or a FITS map, taken off before fractions')
    .option('--thermal-at <frequency>', 'frequency of the thermal share, scaled from there as nu^-0.1 against nu^-alpha (default: the same at all)')
    .addOption(new Option('--laws <where>', 'where laws of P(lambda^2) are fitted').choices(['none', 'integrated', 'sectors', 'pixels']).default('sectors'))
    .option('--sums', 'sums of two laws too, in sectors and integrated light')
    .option('--origin', 'the layers of the scene that each band sees, by region: heights, near and far side, cancelled share (needs --galaxy)')
    .option('--axis <angle>', 'axis of the RM gradient, north through east (default: the major axis)')
    .option('--memory <megabytes>', 'cubes of Q and U that would take more are read by rows, without laws', '4000')
    .option('--out <dir>', 'folder for the results, made where missing', 'out')
    .option('--json', 'a machine-readable summary on stdout')
    .option('--quiet', 'no progress and no words, errors only')
    .action((maps: readonly string[], flags: MeasureFlags) => measure(maps, flags));
}

/** What the flags ask of the channels, checked before any map is touched. */
function checkedFlags(flags: MeasureFlags) {
  return {
    orientation: orientationOf(flags),
    facts: {
      ...(flags.frequency !== undefined && { frequencyHz: oneOrMore(flagList('frequency', flags.frequency, 'Hz')) }),
      ...(flags.width !== undefined && { widthHz: flagQuantity('width', flags.width, 'Hz') }),
      ...(flags.beam !== undefined && { beam: flagBeam('beam', flags.beam) }),
      ...(flags.smooth !== undefined && { smooth: flagBeam('smooth', flags.smooth) }),
      ...(flags.noise !== undefined && { noise: flags.noise }),
      ...(flags.convention && { convention: flags.convention }),
    },
    spectralIndex: flagNumber('spectral-index', flags.spectralIndex, -5, 5),
    threshold: flagNumber('threshold', flags.threshold, 0, 1000),
    sectors: flagNumber('sectors', flags.sectors, 1, 3600, true),
    firstAzimuth: flagQuantity('first-sector', flags.firstSector, 'rad'),
    axis: flags.axis === undefined ? undefined : flagQuantity('axis', flags.axis, 'rad'),
    depths: flags.depths === undefined ? undefined : depthRange(flags.depths),
    scene: flags.origin ? originScene(flags) : undefined,
    memoryBytes: 1e6 * flagNumber('memory', flags.memory, 1, 1e6),
    thermalAtHz: flags.thermalAt === undefined ? undefined : flagQuantity('thermal-at', flags.thermalAt, 'Hz'),
  };
}

async function measure(inputs: readonly string[], flags: MeasureFlags): Promise<void> {
  const asked = checkedFlags(flags);
  const large = openLargeMaps(inputs, asked.facts, asked.memoryBytes);
  try {
    await measureMaps(inputs, flags, asked, large);
  } finally {
    large?.close();
  }
}

async function measureMaps(inputs: readonly string[], flags: MeasureFlags, asked: ReturnType<typeof checkedFlags>, large: LargeMaps | undefined): Promise<void> {
  const { orientation } = asked;
  const read = large?.data ?? readMaps(inputs, asked.facts);
  const edgesKpc = flags.radii === undefined ? usualEdges(read, orientation) : flagList('radii', flags.radii, 'kpc');
  const layout = makeLayout(read.frame, orientation, { edgesKpc, sectors: asked.sectors, firstAzimuth: asked.firstAzimuth });
  if (!layout.regionOf.some((region) => region >= 0)) throw new InputError('no pixel of the maps lies in any ring: check --centre, --distance and --radii');
  const thermal = thermalShares(flags, asked.thermalAtHz, asked.spectralIndex, read);
  const channels = large?.channels ?? read.bands.flatMap((band) => band.channels);
  const noise = Array.from(large?.noise ?? read.bands.flatMap((band) => Array.from(band.noise)));
  const plan = channels.length > 2 ? planDepths(channels, noise, { ...asked.depths, weighting: flags.weights, spectralIndex: asked.spectralIndex }) : undefined;
  sayWords(flags, ...read.notes.map((note) => `assumed  ${note}`), ...planWords(read, layout, plan, channels.length, noise));

  const controller = new AbortController();
  const stop = (): void => controller.abort(new Cancelled());
  process.once('SIGINT', stop);
  process.once('SIGTERM', stop);
  const progress = makeProgress(process.stderr, flags.quiet ?? false);
  const pause = (): Promise<void> => new Promise((resolve) => setImmediate(resolve));
  const watch = (what: string, unit: string) => ({
    onProgress: (done: number, total: number) => progress.show(what, done, total, unit),
    pause,
    signal: controller.signal,
  });
  try {
    const folder = new OutputFolder(flags.out);
    const provenance = measureProvenance(inputs, flags);
    const search = { threshold: asked.threshold, ...(flags.deconvolve && { deconvolve: {} }), ...watch('Faraday spectra', 'rows') };
    const { maps, cube } = large && plan ? await largeDepths(large, plan, flags.out, provenance, search) : await findDepths(read, plan, orientation, search);
    const data = large && plan && maps ? { ...read, bands: [peakBand(plan, maps)] } : read;
    const axis = asked.axis ?? orientation.positionAngle;
    const bands: MeasuredBand[] = [];
    for (const band of data.bands) bands.push(await measureBand(data, band, layout, orientation, axis, { threshold: asked.threshold, spectralIndex: asked.spectralIndex, pause, signal: controller.signal }));
    const rotation = maps && regionRotation(data, layout, maps);
    const pitches = maps && layout.kind === 'rings' ? fieldPitches(data.frame, orientation, layout, maps) : undefined;
    const options: SpectrumOptions = { pixelsPerBeam: pixelsPerBeam(data.frame), spectralIndex: asked.spectralIndex, ...(thermal && { thermal }) };
    const fits = flags.laws === 'none' || channels.length < 2 || large ? [] : await fitRegionLaws(data, layout, lawsOf(flags), options, flags.laws !== 'integrated', watch('fitting laws', 'regions'));
    if (maps) addDepthFiles(folder, data, plan, maps, cube, provenance);
    if (flags.laws === 'pixels' && maps && !large) await addLawMaps(folder, data, layout, maps, options, provenance, watch('fitting laws to pixels', 'pixels'));
    const meta = { program: `gyrelight ${version}`, maps: inputs.join(' '), ...(data.frame.beam && { beam: `${data.frame.beam.majorArcsec} x ${data.frame.beam.minorArcsec} arcsec` }) };
    const meanThermal = (frequencyHz: number): number => meanOver(layout, thermal, frequencyHz);
    folder.add('profiles.csv', profilesCsv(data, layout, bands, rotation, pitches, { thermal: meanThermal, spectralIndex: asked.spectralIndex, meta }));
    if (fits.length > 0) folder.add('laws.csv', lawsCsv(layout, fits, meta));
    if (asked.scene) {
      const { onProgress } = watch('layers seen', 'rays');
      folder.add('origin.csv', originCsv(asked.scene, data, layout, onProgress, meta));
    }
    addPlots(folder, data, layout, bands, maps, rotation, large ? undefined : plan, fits);
    const quantities = [
      ...bands.map((band) => ({ name: `P ${band.band.name}`, values: band.regions.map(({ P }) => P.value), errors: band.regions.map(({ P }) => P.error) })),
      ...(rotation ? [{ name: 'RM', values: rotation.map(({ value }) => value), errors: rotation.map(({ error }) => error) }] : []),
      ...bands.flatMap((band) => (band.rm ? [{ name: `RM ${band.band.name}`, values: band.regions.map(({ rm }) => rm?.value ?? NaN), errors: band.regions.map(({ rm }) => rm?.error ?? NaN) }] : [])),
    ];
    const summary = measureSummary({ data, layout, bands, plan, fits, pitches, axis, harmonics: ringHarmonics(layout, quantities), change: changeOfGradient(bands), files: folder.names });
    const text = `${JSON.stringify(summary, null, 2)}\n`;
    folder.add('summary.json', text);
    folder.write();
    if (flags.json) process.stdout.write(text);
    const best = fits[0]?.fits[0];
    sayWords(flags, ...(best ? [`integrated light: ${best.law.title} fits best (χ² ${best.chi2.toFixed(1)} for ${best.degreesOfFreedom} degrees of freedom)`] : []), `Profiles, maps and plots: ${flags.out}/`);
  } finally {
    progress.close();
    process.off('SIGINT', stop);
    process.off('SIGTERM', stop);
  }
}

/** Four rings out to the volume of the scene, or to four fifths of half the map. */
function usualEdges({ frame }: MapData, { distanceKpc, radiusKpc }: DiscOrientation & { readonly radiusKpc?: number }): number[] {
  const { wcs, nx, ny } = frame;
  const pixelKpc = Math.sqrt(Math.abs(wcs.cd[0] * wcs.cd[3] - wcs.cd[1] * wcs.cd[2])) * 3600 * arcsec * distanceKpc;
  const half = 0.4 * Math.min(nx, ny) * pixelKpc;
  const outer = radiusKpc === undefined ? half : Math.min(radiusKpc, half);
  return [0, 1, 2, 3, 4].map((k) => (outer * k) / 4);
}

/** The thermal share of I by pixel and frequency, from a number or a map. */
function thermalShares({ thermalFraction }: MeasureFlags, atHz: number | undefined, alpha: number, { frame }: MapData): SpectrumOptions['thermal'] {
  if (thermalFraction === undefined) {
    if (atHz !== undefined) throw new InputError('--thermal-at goes with --thermal-fraction only');
    return undefined;
  }
  const at = (share: number, frequencyHz: number): number => (atHz === undefined ? share : thermalShare(share, atHz, frequencyHz, alpha));
  const flag = `--thermal-fraction ${thermalFraction}`;
  if (/^[-+.\d]/.test(thermalFraction) && Number.isFinite(Number(thermalFraction))) {
    const share = flagNumber('thermal-fraction', thermalFraction, 0, 0.999);
    return (_, frequencyHz) => at(share, frequencyHz);
  }
  const image = skyImageFromFits(readFits(readBytes(thermalFraction), thermalFraction), thermalFraction);
  if (!sameGrid({ ...image, file: thermalFraction }, frame)) throw new InputError('the map is on another grid than the maps to measure', { flag });
  const wrong = image.values.find((value) => value < 0 || value >= 1);
  if (wrong !== undefined) throw new InputError(`the map has a share of ${wrong}; allowed: 0 to below 1`, { flag });
  return (pixel, frequencyHz) => at(image.values[pixel], frequencyHz);
}

function meanOver(layout: Layout, thermal: SpectrumOptions['thermal'], frequencyHz: number): number {
  if (!thermal) return 0;
  let [sum, count] = [0, 0];
  layout.regionOf.forEach((region, pixel) => {
    const share = region < 0 ? NaN : thermal(pixel, frequencyHz);
    if (!Number.isFinite(share)) return;
    sum += share;
    count++;
  });
  return count > 0 ? sum / count : 0;
}

/** What the channels can tell, said before the work. */
function planWords(data: MapData, layout: Layout, plan: DepthPlan | undefined, channels: number, noise: readonly number[]): string[] {
  const words = (value: number): string => `${Number(value.toPrecision(3))} rad/m^2`;
  const first = `${data.bands.length} band${data.bands.length === 1 ? '' : 's'}, ${channels} channel${channels === 1 ? '' : 's'}; ${layout.groups} ${layout.kind}, ${layout.regions.length} regions`;
  const silent = noise.some((rms) => !(rms > 0)) ? ['no noise is stated (--noise): errors of maps and profiles are 0, those of laws come from the scatter'] : [];
  if (!plan) return [first, ...silent];
  return [
    first,
    ...silent,
    `Faraday spectrum: resolution ${words(plan.resolution)}, largest depth ${words(plan.largestDepth)}, largest scale ${words(plan.largestScale)}`,
    `depths ${words(plan.firstDepth)} to ${words(plan.firstDepth + plan.step * (plan.count - 1))} in steps of ${words(plan.step)}; noise of the spectrum ${plan.noise.toExponential(2)} ${data.unit}`,
  ];
}

async function addLawMaps(folder: OutputFolder, data: MapData, layout: Layout, maps: DepthMaps, options: SpectrumOptions, provenance: Provenance, watch: Parameters<typeof lawMaps>[4]): Promise<void> {
  const { nx, ny } = data.frame;
  const spectrumOf = (pixel: number): ReturnType<typeof regionSpectrum> => regionSpectrum(data.bands, [pixel], nx * ny, { ...options, pixelsPerBeam: 1 });
  const pixels = [...maps.depth.keys()].filter((k) => Number.isFinite(maps.depth[k]) && layout.regionOf[k] >= 0 && spectrumOf(k).q.every(Number.isFinite));
  const found = await lawMaps(laws, pixels, nx * ny, spectrumOf, watch);
  const shared = { sky: data.frame, ...(data.frame.beam && { beam: data.frame.beam }) };
  const list = laws.map((law, k) => `${k}: ${law.name}`).join('; ');
  const add = (name: string, quantity: string, unit: string, values: Float64Array, comments: readonly string[]): void =>
    folder.add(`laws/${name}.fits`, mapFits({ ...shared, quantity, unit, values, comments }, provenance, 32));
  add('best', 'best law', '', found.best, [`The law of lowest BIC: ${list}.`]);
  add('reduced-chi2', 'chi2 per degree of freedom', '', found.reducedChi2, ['Of the best law.']);
  add('lead', 'BIC of the next law less that of the best', '', found.lead, ['Below 2 the data cannot tell the two apart.']);
  const unitOf = new Map(laws.flatMap((law) => law.parameters.map(({ name, unit }) => [name, unit] as const)));
  for (const [name, values] of Object.entries(found.values)) {
    if (!values.some(Number.isFinite)) continue;
    const unit = unitOf.get(name) ?? '';
    const shown = (plane: Float64Array): Float64Array => (unit === 'rad' ? inDegrees(plane) : plane);
    add(name, name, unit === 'rad' ? 'deg' : unit, shown(values), [`Parameter ${name} of the best law where it has one.`]);
    add(`${name}-error`, `${name} error`, unit === 'rad' ? 'deg' : unit, shown(found.errors[name]), ['One standard deviation.']);
  }
}

function addPlots(folder: OutputFolder, data: MapData, layout: Layout, bands: readonly MeasuredBand[], maps: DepthMaps | undefined, rotation: readonly RegionMean[] | undefined, plan: DepthPlan | undefined, fits: readonly RegionLaws[]): void {
  for (let group = 0; group < layout.groups; group++) {
    const name = `${layout.kind === 'rings' ? 'ring' : 'strip'}-${group + 1}`;
    folder.add(`plots/P-${name}.svg`, profilePlot(layout, 'P', data.unit, group, bands.map(({ band, regions }) => ({ label: band.name, values: regions.map(({ P }) => P) }))));
    const own = bands.flatMap(({ band, rm, regions }) => (rm ? [{ label: band.name, values: regions.map((region) => region.rm) }] : []));
    if (rotation) folder.add(`plots/RM-${name}.svg`, profilePlot(layout, 'RM', 'rad/m2', group, [{ label: 'all bands', values: rotation }, ...(own.length > 1 ? own : [])]));
  }
  if (maps) folder.add('plots/RM.svg', rotationPlot(data, maps.depth));
  if (plan) folder.add('plots/faraday-spectrum.svg', spectrumPlot(plan, integratedSpectrum(data, layout, plan), data.unit));
  if (fits.length > 0) folder.add('plots/laws.svg', lawPlot(fits[0], data.unit));
}

/** |F| of the mean Q and U within the layout. */
function integratedSpectrum(data: MapData, layout: Layout, plan: DepthPlan): Float64Array {
  const pixels = [...layout.regionOf.keys()].filter((k) => layout.regionOf[k] >= 0);
  const bare = data.bands.map(({ channels, Q, U, noise }) => ({ channels, Q, U, noise }));
  const { q, u } = regionSpectrum(bare, pixels, data.frame.nx * data.frame.ny, { pixelsPerBeam: 1 });
  const { re, im } = makeDepthTransform(plan)(q, u, 1);
  return re.map((value, k) => Math.hypot(value, im[k]));
}

/** What outputs of `measure` carry: the command that made them. */
function measureProvenance(inputs: readonly string[], flags: MeasureFlags): Provenance {
  const lines = Object.entries(flags).map(([name, value]) => `${name}: ${JSON.stringify(value)}`);
  return { sceneText: ['# gyrelight measure', `maps: ${JSON.stringify(inputs)}`, ...lines, ''].join('\n'), version, seed: 0 };
}
