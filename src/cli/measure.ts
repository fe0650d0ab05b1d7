import type { Command } from 'commander';
import { Option } from 'commander';
import type { Provenance } from '../files/fits-scene.ts';
import { pixelsPerBeam, type DiscOrientation } from '../measure/disc.ts';
import { makeLayout } from '../measure/layout.ts';
import { regionSpectrum, sumRegions, type SpectrumOptions } from '../measure/region-spectrum.ts';
import { planDepths } from '../sky/depth-spectrum.ts';
import { arcsec } from '../sky/grid.ts';
import { InputError } from '../units/input-error.ts';
import { addDepthFiles, beginDepthCube, depthsOfAngles, depthsOfSpectra } from './measure-depths.ts';
import { depthRange, flagBeam, flagList, flagNumber, flagQuantity, lawsOf, oneOrMore, orientationOf, originScene, type MeasureFlags } from './measure-flags.ts';
import { openMaps, type MapData, type OpenMaps } from './measure-input.ts';
import { addLawMaps } from './measure-law-maps.ts';
import { addOrigins } from './measure-origin.ts';
import { addPlots } from './measure-plots.ts';
import { changeOfGradient, fieldPitches, fitRegionLaws, measureBand, regionRotation, ringHarmonics, ringQuantities, type MeasuredBand } from './measure-run.ts';
import { runSmoothings } from './measure-smooth.ts';
import { measureSummary } from './measure-summary.ts';
import { lawsCsv, profilesCsv } from './measure-tables.ts';
import { meanThermalShare, thermalShares } from './measure-thermal.ts';
import { planWords, resultWords } from './measure-words.ts';
import { OutputFolder } from './output-folder.ts';
import { makeProgress } from './progress.ts';
import { Cancelled, sayWords } from './run-context.ts';
import { version } from '../files/version.ts';

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
    .option('--origin', 'the layers of the scene that each band sees, as maps and by region: heights, near and far side, cancelled share (needs --galaxy)')
    .option('--axis <angle>', 'axis of the RM gradient, north through east (default: the major axis)')
    .option('--memory <megabytes>', 'maps that would take more are read by rows as they are needed', '4000')
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
    memoryBytes: 1e6 * flagNumber('memory', flags.memory, 0.1, 1e6),
    thermalAtHz: flags.thermalAt === undefined ? undefined : flagQuantity('thermal-at', flags.thermalAt, 'Hz'),
  };
}

async function measure(inputs: readonly string[], flags: MeasureFlags): Promise<void> {
  const asked = checkedFlags(flags);
  const maps = openMaps(inputs, asked.facts, asked.memoryBytes);
  const folder = new OutputFolder(flags.out);
  const controller = new AbortController();
  const stop = (): void => controller.abort(new Cancelled());
  process.once('SIGINT', stop);
  process.once('SIGTERM', stop);
  const progress = makeProgress(process.stderr, flags.quiet ?? false);
  const pause = (): Promise<void> => new Promise((resolve) => setImmediate(resolve));
  const watch: WatchOf = (what, unit) => ({
    onProgress: (done, total) => progress.show(what, done, total, unit),
    pause,
    signal: controller.signal,
  });
  try {
    await measureMaps(inputs, flags, asked, maps, folder, watch);
  } catch (error) {
    folder.abandon();
    throw error;
  } finally {
    progress.close();
    maps.close();
    process.off('SIGINT', stop);
    process.off('SIGTERM', stop);
  }
}

/** How work is watched: what it does, and what it counts. */
type WatchOf = (what: string, unit: string) => { readonly onProgress: (done: number, total: number) => void; readonly pause: () => Promise<void>; readonly signal: AbortSignal };

async function measureMaps(inputs: readonly string[], flags: MeasureFlags, asked: ReturnType<typeof checkedFlags>, { data, smoothings, isLarge }: OpenMaps, folder: OutputFolder, watch: WatchOf): Promise<void> {
  const { orientation, spectralIndex, threshold } = asked;
  const { nx, ny } = data.frame;
  const edgesKpc = flags.radii === undefined ? usualEdges(data, orientation) : flagList('radii', flags.radii, 'kpc');
  const layout = makeLayout(data.frame, orientation, { edgesKpc, sectors: asked.sectors, firstAzimuth: asked.firstAzimuth });
  if (!layout.regionOf.some((region) => region >= 0)) throw new InputError('no pixel of the maps lies in any ring: check --centre, --distance and --radii');
  const thermal = thermalShares(flags, asked.thermalAtHz, spectralIndex, data);
  const channels = data.bands.flatMap((band) => band.channels);
  const noise = data.bands.flatMap((band) => Array.from(band.noise));
  const plan = channels.length > 2 ? planDepths(channels, noise, { ...asked.depths, weighting: flags.weights, spectralIndex }) : undefined;
  sayWords(flags, ...data.notes.map((note) => `assumed  ${note}`), ...(isLarge ? ['the maps are large (--memory): their rows are read as they are needed'] : []), ...planWords(data, layout, plan, channels.length, noise, threshold));

  const provenance = measureProvenance(inputs, flags);
  const meta = { program: `gyrelight ${version}`, maps: inputs.join(' '), ...(data.frame.beam && { beam: `${data.frame.beam.majorArcsec} x ${data.frame.beam.minorArcsec} arcsec` }) };
  await runSmoothings(smoothings, watch('smoothing', 'planes'));
  const search = { threshold, ...(flags.deconvolve && { deconvolve: {} }), ...watch('Faraday spectra', 'rows') };
  const maps = plan ? await depthsOfSpectra(data, plan, beginDepthCube(data, plan, folder, provenance), search) : depthsOfAngles(data, orientation);
  const axis = asked.axis ?? orientation.positionAngle;
  const bands: MeasuredBand[] = [];
  for (const band of data.bands) bands.push(await measureBand(data, band, layout, orientation, axis, maps, { threshold, spectralIndex, ...watch(`RM of ${band.name}`, 'rows') }));
  const change = changeOfGradient(bands);
  const rotation = maps && regionRotation(data, layout, maps);
  const pitches = maps && layout.kind === 'rings' ? fieldPitches(data.frame, orientation, layout, maps) : undefined;
  const sums = await sumRegions(data.bands, { nx, ny, regionOf: layout.regionOf, count: layout.regions.length }, thermal, watch('spectra of regions', 'rows'));
  const options: SpectrumOptions = { pixelsPerBeam: pixelsPerBeam(data.frame), spectralIndex };
  const fits = flags.laws === 'none' || channels.length < 2 ? [] : await fitRegionLaws(sums, layout, lawsOf(flags), options, flags.laws !== 'integrated', watch('fitting laws', 'regions'));
  if (maps) addDepthFiles(folder, data, plan, maps, provenance);
  if (flags.laws === 'pixels' && maps) await addLawMaps(folder, data, layout, maps, spectralIndex, thermal, provenance, watch('fitting laws to pixels', 'pixels'));
  folder.add('profiles.csv', profilesCsv(data, layout, bands, rotation, pitches, { thermal: (frequencyHz) => meanThermalShare(layout, thermal, frequencyHz), spectralIndex, meta }));
  if (fits.length > 0) folder.add('laws.csv', lawsCsv(layout, fits, meta));
  if (asked.scene) await addOrigins(folder, asked.scene, data, layout, watch('layers seen', 'rays'), meta, provenance);
  const light = regionSpectrum(sums, [...layout.regions.keys()], { ...options, spectralIndex: 0, isPlain: true });
  addPlots(folder, data, layout, bands, { maps, rotation, plan, light, fits });
  const summary = measureSummary({ data, layout, bands, plan, fits, pitches, axis, harmonics: ringHarmonics(layout, ringQuantities(bands, rotation)), change, files: folder.names });
  const text = `${JSON.stringify(summary, null, 2)}\n`;
  folder.add('summary.json', text);
  folder.write();
  if (flags.json) process.stdout.write(text);
  sayWords(flags, ...resultWords(bands, axis, change, fits), `Profiles, maps and plots: ${flags.out}/`);
}

/** Four rings out to the volume of the scene, or to four fifths of half the map. */
function usualEdges({ frame }: MapData, { distanceKpc, radiusKpc }: DiscOrientation & { readonly radiusKpc?: number }): number[] {
  const { wcs, nx, ny } = frame;
  const pixelKpc = Math.sqrt(Math.abs(wcs.cd[0] * wcs.cd[3] - wcs.cd[1] * wcs.cd[2])) * 3600 * arcsec * distanceKpc;
  const half = 0.4 * Math.min(nx, ny) * pixelKpc;
  const outer = radiusKpc === undefined ? half : Math.min(radiusKpc, half);
  return [0, 1, 2, 3, 4].map((k) => (outer * k) / 4);
}

/** What outputs of `measure` carry: the command that made them. */
function measureProvenance(inputs: readonly string[], flags: MeasureFlags): Provenance {
  const lines = Object.entries(flags).map(([name, value]) => `${name}: ${JSON.stringify(value)}`);
  return { sceneText: ['# gyrelight measure', `maps: ${JSON.stringify(inputs)}`, ...lines, ''].join('\n'), version, seed: 0 };
}
