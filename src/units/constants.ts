/** A physical constant: its value, the unit it is in, and where the number comes from. */
export interface Constant {
  readonly value: number;
  readonly unit: string;
  readonly source: string;
}

/** Makes a constant. Throws an Error where the value is not finite or unit or source is missing. */
export function constant(value: number, unit: string, source: string): Constant {
  if (!Number.isFinite(value)) throw new Error(`a constant of unit "${unit}" is ${value}`);
  if (unit.trim() === '') throw new Error(`the constant ${value} has no unit (say "1" for none)`);
  if (source.trim() === '') throw new Error(`the constant ${value} ${unit} has no source`);
  return Object.freeze({ value, unit, source });
}

const CODATA = 'CODATA 2018 (Tiesinga et al. 2021)';

export const elementaryCharge = constant(1.602176634e-19, 'C', `${CODATA}, exact`);
export const electronMass = constant(9.1093837015e-31, 'kg', CODATA);
export const protonMass = constant(1.67262192369e-27, 'kg', CODATA);
export const speedOfLight = constant(299792458, 'm/s', `${CODATA}, exact`);
export const vacuumPermittivity = constant(8.8541878128e-12, 'F/m', CODATA);
export const boltzmannConstant = constant(1.380649e-23, 'J/K', `${CODATA}, exact`);
export const planckConstant = constant(6.62607015e-34, 'J s', `${CODATA}, exact`);

export const parsec = constant(
  3.0856775814913673e16,
  'm',
  'IAU 2015 resolution B2, note 4: 648000/pi au, with au = 149597870700 m (IAU 2012 resolution B2)',
);
export const jansky = constant(1e-26, 'W m^-2 Hz^-1', 'definition (IAU 1973)');
export const julianYear = constant(365.25 * 86400, 's', 'definition (IAU style manual 1989)');

/** The electron's charge in Gaussian units: q[statC] = 10 c[m/s] q[C]. */
export const elementaryChargeGaussian = constant(
  10 * speedOfLight.value * elementaryCharge.value,
  'statC',
  'elementaryCharge in Gaussian units: 10 c e',
);

// Products, not powers: the last bits of those depend on the engine.
const chargeOverMomentum = elementaryCharge.value / electronMass.value / speedOfLight.value;

/** K in SI: depth in rad = K * integral of n_e B_parallel ds, with m^-3, T and m. */
export const faradayConstantSI = constant(
  (chargeOverMomentum * chargeOverMomentum * (elementaryCharge.value / speedOfLight.value)) / (8 * Math.PI * Math.PI * vacuumPermittivity.value),
  'T^-1',
  'e^3/(8 pi^2 eps0 m_e^2 c^3) (Burn 1966; Rybicki & Lightman 1979, section 8.2)',
);

/** K as this program uses it: depth = K * n_e [cm^-3] * B_parallel [uG] * length [pc]. */
export const faradayConstant = constant(
  faradayConstantSI.value * 1e6 * 1e-10 * parsec.value,
  'rad m^-2 per (cm^-3 uG pc)',
  'faradayConstantSI for 1e6 m^-3, 1e-10 T and one parsec',
);

/** Solid angle of an elliptical Gaussian beam over the product of its two FWHM. */
export const beamSolidAngleFactor = constant(
  Math.PI / (4 * Math.LN2),
  '1',
  'integral of a two-dimensional Gaussian: pi/(4 ln 2)',
);

/** Frequency at which an electron at rest circles in a field of 1 uG. */
export const gyrofrequencyPerMicrogauss = constant(
  (elementaryCharge.value * 1e-10) / (2 * Math.PI * electronMass.value),
  'Hz/uG',
  'e B/(2 pi m_e) (Rybicki & Lightman 1979, section 6.1)',
);

/** Brightness temperature of 1 Jy/sr at 1 Hz; at frequency nu divide by nu^2 (Rayleigh-Jeans). */
export const kelvinPerJanskySteradian = constant(
  (jansky.value * speedOfLight.value ** 2) / (2 * boltzmannConstant.value),
  'K Hz^2 per (Jy/sr)',
  'T = c^2 I/(2 k nu^2) (Rybicki & Lightman 1979, eq. 1.59)',
);
