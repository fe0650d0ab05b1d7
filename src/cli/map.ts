import type { Command } from 'commander';
import { gasMaps } from '../sky/gas-maps.ts';
import { lookAt } from '../sky/observe.ts';
import { addDepthBins, depthBinsFlag } from './depth-bin-files.ts';
import { addCommonFlags, overridesOf, sayWords, withRunContext, type CommonFlags } from './run-context.ts';
import { addGasFiles } from './gas-files.ts';
import { loadScene } from './load-scene.ts';
import { addMapFiles, addOriginMaps, mapSummary } from './map-files.ts';
import { OutputFolder } from './output-folder.ts';
import { durationText } from './progress.ts';

/** `gyrelight map SCENE`: maps and cubes of a scene. */
export function addMap(program: Command): void {
  addCommonFlags(program.command('map <scene>').description('maps and cubes of a scene: I, Q, U, P, RM … as FITS, with an overview'))
    .option('--origin', 'maps of the layer that each band sees: heights at 16, 50 and 84 % of the light, near side, cancelled share')
    .option('--depth-bins <width>', 'true Faraday spectrum of each pixel: emission by the depth it lies at, in bins of such as "5 rad/m^2"', depthBinsFlag)
    .action(async (path: string, flags: CommonFlags & { readonly origin?: boolean; readonly depthBins?: number }) => {
      const { scene, provenance } = loadScene(path, overridesOf(flags));
      const started = Date.now();
      const folder = new OutputFolder(flags.out);
      // Written before Ctrl-C ends the process again: it waits until every file is whole.
      const { sky, text, seconds } = await withRunContext(flags, async ({ pool, progress, signal }) => {
        const gas = await gasMaps(scene, { signal, onProgress: (done, total) => progress.show('gas', done, total, 'rays') });
        const seen = await lookAt(scene, pool.backend, { signal, onProgress: (done, total) => progress.show('following rays', done, total, 'rays') });
        const bands = await addMapFiles(folder, scene, seen, provenance, { signal, onProgress: (done, total) => progress.show('writing cubes', done, total, 'channels') });
        addGasFiles(folder, scene, gas, seen.grid, provenance);
        if (flags.origin) await addOriginMaps(folder, scene, seen, provenance, { signal, onProgress: (done, total) => progress.show('layers seen', done, total, 'rays') });
        const pause = (): Promise<void> => new Promise((resolve) => setImmediate(resolve));
        if (flags.depthBins !== undefined) await addDepthBins(folder, scene, seen, flags.depthBins, provenance, { signal, pause, onProgress: (done, total) => progress.show('Faraday spectra', done, total, 'rays') });
        const took = (Date.now() - started) / 1000;
        const summary = `${JSON.stringify(mapSummary(scene, seen, bands, provenance, took, folder.names), null, 2)}\n`;
        folder.add('summary.json', summary);
        folder.write();
        return { sky: seen, text: summary, seconds: took };
      }).catch((error: unknown) => {
        folder.abandon();
        throw error;
      });
      if (flags.json) process.stdout.write(text);
      sayWords(
        flags,
        `${scene.title}: ${sky.bands.length} band${sky.bands.length === 1 ? '' : 's'}, ${sky.grid.nx} x ${sky.grid.ny} pixels, ` +
          `${sky.samplesPerRay.toFixed(0)} samples a ray, estimated error ${sky.errorReached.toExponential(1)} (asked: ${scene.numerics.tolerance}), ${durationText(seconds)}`,
        `Maps: ${flags.out}/`,
      );
    });
}
