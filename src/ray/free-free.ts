import { steadyPower } from '../math/steady.ts';
import { boltzmannConstant, jansky, speedOfLight } from '../units/constants.ts';

/** Optical depth of free-free absorption per emission measure, exponents of temperature and frequency (Mezger & Henderson 1967). */
const opacityAtOne = 8.235e-2;
const temperatureExponent = -1.35;
const frequencyExponent = -2.1;

/** Emission measure of a path of 1 kpc through ⟨n_e²⟩ = 1 cm^-6, pc cm^-6. */
export const emissionMeasurePerKpc = 1e3;

/** Free-free optical depth of an emission measure of 1 pc cm^-6 (Mezger & Henderson 1967). */
export function freeFreeOpacity(temperatureK: number, frequencyHz: number): number {
  return opacityAtOne * steadyPower(temperatureK, temperatureExponent) * steadyPower(frequencyHz / 1e9, frequencyExponent);
}

/** Brightness of an opaque gas, 2kTν²/c² (Rayleigh–Jeans), Jy/sr. */
export function opaqueBrightness(temperatureK: number, frequencyHz: number): number {
  return (2 * boltzmannConstant.value * temperatureK * (frequencyHz / speedOfLight.value) ** 2) / jansky.value;
}

/** What thermal gas does to each frequency of a spectrum. */
export interface FreeFree {
  /** Optical depth per pc cm^-6. */
  readonly opacity: Float64Array;
  /** Brightness of the gas where it is opaque, in the unit of a ray's sums. */
  readonly source: Float64Array;
}

/**
 * Thermal emission of a whole ray: gas of one temperature emits source · (1 - e^-τ) however it is
 * spread, so that it need not be integrated.
 */
export function thermalEmission({ opacity, source }: FreeFree, frequency: number, emissionMeasure: number): number {
  return -source[frequency] * Math.expm1(-opacity[frequency] * emissionMeasure);
}
