import { steadyPower } from '../math/steady.ts';
import { gamma } from '../math/special.ts';
import { electronMass, elementaryChargeGaussian, faradayConstant, jansky, parsec, speedOfLight } from '../units/constants.ts';

const chargeCgs = elementaryChargeGaussian.value;
const massCgs = electronMass.value * 1e3;
const lightCgs = speedOfLight.value * 1e2;
const kpcInCm = parsec.value * 1e5;
const janskyCgs = jansky.value * 1e3;
const gaussPerMicroGauss = 1e-6;

/**
 * Synchrotron emissivity j_I / (C B_⊥^{(p+1)/2}) of a power law N(γ)dγ = C γ^-p dγ, isotropic:
 * erg s^-1 cm^-3 Hz^-1 sr^-1 for C in cm^-3 and B_⊥ in uG (Rybicki & Lightman 1979, eq. 6.36,
 * times 2π per Hz and 1/4π per sr).
 */
export function synchrotronEmissivity(index: number, frequencyHz: number): number {
  const p = index;
  const size = (Math.sqrt(3) * chargeCgs * chargeCgs * chargeCgs) / (4 * Math.PI * massCgs * lightCgs * lightCgs * (p + 1));
  const gammas = gamma(p / 4 + 19 / 12) * gamma(p / 4 - 1 / 12);
  const spectrum = steadyPower((2 * Math.PI * massCgs * lightCgs * frequencyHz) / (3 * chargeCgs * gaussPerMicroGauss), -(p - 1) / 2);
  return size * gammas * spectrum * gaussPerMicroGauss;
}

/** Degree of polarization of that emission in a uniform field (Rybicki & Lightman 1979, eq. 6.38b). */
export function intrinsicPolarization(index: number): number {
  return (index + 1) / (index + 7 / 3);
}

/** Jy/sr per kpc of path with C = 1 cm^-3 and B_⊥ = 1 uG. */
export function brightnessPerKpc(index: number, frequencyHz: number): number {
  return (synchrotronEmissivity(index, frequencyHz) * kpcInCm) / janskyCgs;
}

/** Faraday depth per kpc for n_e = 1 cm^-3 and B_∥ = 1 uG, rad m^-2. */
export const faradayDepthPerKpc = faradayConstant.value * 1e3;

/** λ², m². */
export function wavelengthSquared(frequencyHz: number): number {
  const wavelength = speedOfLight.value / frequencyHz;
  return wavelength * wavelength;
}
