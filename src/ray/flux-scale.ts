import { compileJavaScript, type Kernel } from '../formula/javascript.ts';
import { hasWasmSimd } from '../formula/wasm/available.ts';
import { compileWasm } from '../formula/wasm/kernel.ts';
import type { Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import type { Integrand, SpectralPoint } from './integrand.ts';
import { structureKey } from './structure-key.ts';
import { brightnessPerKpc } from './synchrotron.ts';
import { integrateVolume, type VolumeFunction } from './volume-integral.ts';

/** What is taken of an integrand, with the places of its outputs: handed in, since integrands need this factor. */
export interface FluxIntegrand {
  compile(scene: Scene, spectrum: readonly SpectralPoint[]): Integrand;
  readonly total: number;
  readonly firstGroup: number;
  readonly tableShape: Parameters<typeof compileWasm>[1];
}

/** Share of a scene's tolerance that the integral over the volume may be wrong by. */
const shareOfTolerance = 0.1;

const factors = new WeakMap<Scene, number>();
const compiled = new Map<string, { readonly integrand: Integrand; readonly kernel: Kernel }>();

/**
 * The factor on all cosmic-ray layers that gives a scene with `scaleTo` its flux density: that of
 * the synchrotron emission of the whole volume at one frequency, before absorption, channels and
 * beam, integrated over the volume itself and so independent of the image. 1 without `scaleTo`.
 * Throws InputError where the model emits nothing.
 */
export function fluxFactor(scene: Scene, flux: FluxIntegrand): number {
  const { scaleTo, index } = scene.cosmicRays;
  if (!scaleTo) return 1;
  const known = factors.get(scene);
  if (known !== undefined) return known;
  const emitted = unscaledFluxJy(scene, index, scaleTo.atHz, flux);
  if (!(emitted > 0)) throw new InputError('cosmicRays.scaleTo: the model emits nothing that could be scaled to a flux density');
  const factor = scaleTo.fluxJy / emitted;
  factors.set(scene, factor);
  return factor;
}

function unscaledFluxJy(scene: Scene, index: number, atHz: number, flux: FluxIntegrand): number {
  const unscaled: Scene = { ...scene, cosmicRays: { index, layers: scene.cosmicRays.layers } };
  const spectrum = [{ frequencyHz: atHz, centreHz: atHz }];
  const { integrand, kernel } = compiledFor(unscaled, spectrum, flux);
  const inputs = integrand.inputs(unscaled);
  let outputs: Float64Array[] = [];
  const emission: VolumeFunction = (x, y, z, into) => {
    if ((outputs[0]?.length ?? 0) < x.length) outputs = integrand.program.outputs.map(() => new Float64Array(x.length));
    kernel.evaluate(x.length, inputs.parameters, [x, y, z], outputs, inputs.tables, inputs.grids);
    for (let k = 0; k < x.length; k++) into[k] = outputs[flux.total][k] * outputs[flux.firstGroup][k];
  };
  const { radiusKpc, heightKpc } = scene.galaxy.volume;
  const integral = integrateVolume(emission, { radiusKpc, heightKpc, edges: inputs.edges }, shareOfTolerance * scene.numerics.tolerance);
  return (integral * brightnessPerKpc(index, atHz)) / scene.galaxy.distanceKpc ** 2;
}

function compiledFor(scene: Scene, spectrum: readonly SpectralPoint[], { compile, tableShape }: FluxIntegrand): { readonly integrand: Integrand; readonly kernel: Kernel } {
  const key = structureKey(scene, spectrum);
  let known = compiled.get(key);
  if (!known) {
    const integrand = compile(scene, spectrum);
    known = { integrand, kernel: hasWasmSimd() ? compileWasm(integrand.program, tableShape) : compileJavaScript(integrand.program) };
    if (compiled.size >= 8) compiled.delete([...compiled.keys()][0]);
    compiled.set(key, known);
  }
  return known;
}
