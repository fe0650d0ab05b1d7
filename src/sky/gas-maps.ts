import { followGas, kpcInCm, type GasColumns } from '../ray/gas-rays.ts';
import { planckBrightness } from '../ray/dust.ts';
import type { Watch } from '../ray/job.ts';
import type { Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import { beamConvolver, beamMargin, beamPlanes, pixelBeam } from './beam.ts';
import { cropPlanes, gridFromScene, gridOffsetsKpc, growGrid, wcsFromGrid } from './grid.ts';
import type { BrightnessUnit } from './types.ts';

/** Maps of the gas, as the beam sees them; each there where the scene asks for it. */
export interface GasMaps {
  /** Density-weighted B_∥, uG, positive towards the observer; NaN where there is no gas, or, behind a beam, below a thousandth of the largest column. */
  readonly zeeman?: Float64Array;
  readonly dust?: Readonly<Record<'I' | 'Q' | 'U', Float64Array>> & { readonly unit: BrightnessUnit };
}

/** Optical depth beyond which dust is not thin. */
const thickAt = 0.1;
/** Behind a beam gas below this share of the map's largest column is none: there the beam's transform rings. */
const leastColumn = 1e-3;
const raysAtOnce = 512;

/**
 * Thermal dust in Stokes I, Q, U and the density-weighted B_∥ of a scene that asks for them: I = opacity N_H B_ν(T), of which
 * the share p0 cos²γ is polarized across the field, γ its angle to the sky (Lee & Draine 1985, thin; I
 * without their small term in cos²γ). No Faraday rotation, no noise; the beam works on ∫ n B_∥ ds and ∫ n ds before
 * their ratio is taken. Throws InputError where the dust is not optically thin.
 */
export async function gasMaps(scene: Scene, { signal, onProgress }: Watch = {}): Promise<GasMaps> {
  const { dust, zeeman, observation } = scene;
  if (!dust && !zeeman) return {};
  const grid = gridFromScene(scene);
  const { beam } = observation;
  const margin = beamMargin(beam, grid);
  const wide = growGrid(grid, margin);
  const gas = await followAll(scene, gridOffsetsKpc(wide), { signal, onProgress });
  const cropped = (planes: Float64Array): Float64Array => cropPlanes(planes, wide.nx, wide.ny, margin);
  const maps: { -readonly [Key in keyof GasMaps]: GasMaps[Key] } = {};
  if (zeeman) {
    if (beam) beamConvolver(pixelBeam(beam, wcsFromGrid(wide).cd), wide.nx, wide.ny)(gas.weight, gas.weightedField);
    const least = (beam ? leastColumn : 0) * gas.weight.reduce((most, value) => Math.max(most, value), 0);
    maps.zeeman = cropped(gas.weightedField.map((value, k) => (gas.weight[k] > least ? value / gas.weight[k] : NaN)));
  }
  if (dust) {
    const depthPerColumn = dust.hydrogenRatio * kpcInCm * dust.opacityCm2;
    const deepest = depthPerColumn * gas.column.reduce((most, value) => Math.max(most, value), 0);
    if (deepest > thickAt) throw new InputError(`dust: the optical depth reaches ${deepest.toPrecision(3)}, but thin dust, below ${thickAt}, is what can be computed: lower dust.opacity or dust.hydrogenRatio`);
    const brightness = depthPerColumn * planckBrightness(dust.temperatureK, dust.frequencyHz);
    const planes = {
      I: gas.column.map((value) => brightness * value),
      Q: gas.Q.map((value) => brightness * dust.polarization * value),
      U: gas.U.map((value) => brightness * dust.polarization * value),
    };
    if (beam) beamPlanes(planes, beam, wide);
    maps.dust = { I: cropped(planes.I), Q: cropped(planes.Q), U: cropped(planes.U), unit: beam ? 'Jy/beam' : 'Jy/sr' };
  }
  return maps;
}

/** All rays, some at a time, so that others have their turn. */
async function followAll(scene: Scene, { northKpc, eastKpc }: ReturnType<typeof gridOffsetsKpc>, { signal, onProgress }: Watch): Promise<GasColumns> {
  const empty = (): Float64Array => new Float64Array(northKpc.length);
  const all: GasColumns = { weight: empty(), weightedField: empty(), column: empty(), Q: empty(), U: empty() };
  for (let from = 0; from < northKpc.length; from += raysAtOnce) {
    signal?.throwIfAborted();
    const to = Math.min(northKpc.length, from + raysAtOnce);
    const part = followGas(scene, { northKpc: northKpc.subarray(from, to), eastKpc: eastKpc.subarray(from, to) });
    for (const key of ['weight', 'weightedField', 'column', 'Q', 'U'] as const) all[key].set(part[key], from);
    onProgress?.(to, northKpc.length);
    await new Promise<void>((resolve) => setTimeout(resolve));
  }
  return all;
}
