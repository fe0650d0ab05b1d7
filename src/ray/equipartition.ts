import { steadyPower } from '../math/steady.ts';
import { electronMass, protonMass, speedOfLight } from '../units/constants.ts';

/** Rest energy of the proton, below which its spectrum is flat in the estimate (Beck & Krause 2005), erg. */
const protonEnergyErg = protonMass.value * speedOfLight.value ** 2 * 1e7;
const electronEnergyErg = electronMass.value * speedOfLight.value ** 2 * 1e7;
const gaussPerMicroGauss = 1e-6;

/**
 * C (cm^-3, per unit γ^-p) of the cosmic-ray electrons in a field of 1 uG whose energy density is
 * that of all cosmic rays; it grows as B². The number ratio of protons to electrons is K0; the
 * protons' spectrum is flat below their rest energy:
 * B²/8π = (K0 + 1) p/(2(p - 2)) N0 E_p^{2-p} with N0 = C (m_e c²)^{p-1} (Beck & Krause 2005, from memory; derived again).
 * For p > 2.
 */
export function equipartitionElectrons(index: number, protonRatio: number): number {
  const energy = gaussPerMicroGauss ** 2 / (8 * Math.PI);
  const perEnergy = (energy * 2 * (index - 2) * steadyPower(protonEnergyErg, index - 2)) / ((protonRatio + 1) * index);
  return perEnergy * steadyPower(electronEnergyErg, 1 - index);
}
