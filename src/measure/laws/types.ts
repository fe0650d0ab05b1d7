/** A complex fraction Q/I + i U/I. */
export interface ComplexFraction {
  readonly re: number;
  readonly im: number;
}

/**
 * What a parameter does, which decides where a fit starts looking for it: fractions and angles come in
 * pairs and enter as p e^{2 i chi}; `rotation` turns the angle, `width` only depolarizes.
 */
export type LawRole = 'fraction' | 'angle' | 'rotation' | 'width' | 'share' | 'ratio' | 'twist';

/** A parameter of a law. Angles rad, depths rad m^-2. */
export interface LawParameter {
  readonly name: string;
  /** In files: rad, rad/m2, or '' for a pure number. */
  readonly unit: 'rad' | 'rad/m2' | '';
  readonly role: LawRole;
  /** Allowed values, inclusive. */
  readonly min: number;
  readonly max: number;
  readonly meaning: string;
}

/** Values of a law's parameters, in their order. */
export type LawValues = Float64Array | readonly number[];

/** A law of P(lambda^2) along one line of sight, or of a beam or sector taken as one. */
export interface Law {
  readonly name: string;
  readonly title: string;
  /** Author year, equation; what is own or differs. */
  readonly source: string;
  readonly parameters: readonly LawParameter[];
  /** The complex fraction at lambda^2 (m^2); `values` in the order of `parameters`. */
  value(lambda2M2: number, values: LawValues): ComplexFraction;
  /** Where parts may change places without changing the law: the order of parameters to report. */
  order?(values: LawValues): readonly number[];
}

/** Widest depth that a fit may find, rad m^-2. */
const farthest = 1e5;

/** Fraction at zero wavelength and the angle of its electric vector. */
export function source(suffix = ''): readonly LawParameter[] {
  return [
    { name: `p${suffix}`, unit: '', role: 'fraction', min: 0, max: Infinity, meaning: 'polarized fraction at zero wavelength' },
    { name: `chi${suffix}`, unit: 'rad', role: 'angle', min: -Infinity, max: Infinity, meaning: 'angle of the electric vector at zero wavelength, north through east' },
  ];
}

/** A depth of either sign. */
export function rotation(name: string, meaning: string): LawParameter {
  return { name, unit: 'rad/m2', role: 'rotation', min: -farthest, max: farthest, meaning };
}

/** A dispersion or thickness in depth, not negative. */
export function width(name: string, meaning: string): LawParameter {
  return { name, unit: 'rad/m2', role: 'width', min: 0, max: farthest, meaning };
}

/** height e^{i angle}. */
export function polar(height: number, angle: number): ComplexFraction {
  return { re: height * Math.cos(angle), im: height * Math.sin(angle) };
}

/** sin x/x, 1 at 0. */
export function sinc(x: number): number {
  return Math.abs(x) < 1e-5 ? 1 - (x * x) / 6 : Math.sin(x) / x;
}
