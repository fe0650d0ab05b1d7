/** Types of a model file (`models/*.yaml`); see `models/README.md` for the format in words. */

export type ModelKind = 'field' | 'density';

/** One parameter of a model, as its file declares it. */
export interface ModelParameter {
  readonly name: string;
  /** Unit text in files; inside formulas angles are in radians, all else as `unit` says. */
  readonly unit: string;
  /** Allowed range, inclusive, in `unit`. */
  readonly range: readonly [number, number];
  readonly meaning: string;
  /** Value where a scene leaves it out, in `unit`; undefined where it is required. */
  readonly default?: number;
  /** Optional parameters that must be given together or not at all share a group name. */
  readonly group?: string;
  /** Only whole numbers are allowed. */
  readonly whole?: boolean;
  /** Zero is not allowed, though it lies in the range. */
  readonly nonZero?: boolean;
}

/** A word chosen in the scene, such as a parity: inside formulas the number of the option. */
export interface ModelChoice {
  readonly name: string;
  /** Word → number that formulas see. */
  readonly options: Readonly<Record<string, number>>;
  readonly default?: string;
  readonly meaning: string;
}

/** How the field or density is given. Exactly one key is present. */
export interface ModelFormulas {
  /** Vector potential in cylindrical or Cartesian components, uG kpc; B = curl A. Parts add. */
  readonly potential?: Readonly<Record<string, string>>;
  /** Euler potentials, B = grad a x grad b. */
  readonly euler?: { readonly a: string; readonly b: string };
  /** B directly, uG: {r, phi, z} or {x, y, z}. With `potential`, only an axisymmetric phi part. */
  readonly field?: Readonly<Record<string, string>>;
  /** Vector potential that spiral arms multiply, where it is not `potential`; that of the same horizontal field. */
  readonly armPotential?: Readonly<Record<string, string>>;
  /** Density, cm^-3. */
  readonly density?: string;
}

/** Surfaces on which formulas jump or have a kink; rays break their panels there. */
export interface ModelEdges {
  /** Heights z, formulas of parameters, kpc. */
  readonly z?: readonly string[];
  /** Radii r, formulas of parameters, kpc. */
  readonly r?: readonly string[];
}

/** One value that the model must give, with where the number comes from. */
export interface ModelCheck {
  readonly parameters: Readonly<Record<string, string | number>>;
  /** kpc, galaxy frame. */
  readonly at: readonly [number, number, number];
  /** uG, Cartesian galaxy frame. */
  readonly field?: readonly [number, number, number];
  /** cm^-3 */
  readonly density?: number;
  readonly source: string;
}

export interface Model {
  readonly name: string;
  readonly kind: ModelKind;
  readonly title: string;
  readonly meaning: string;
  readonly source: string;
  readonly parameters: readonly ModelParameter[];
  readonly choices: readonly ModelChoice[];
  /** Named sub-expressions, in order; each may use those before it. */
  readonly define: Readonly<Record<string, string>>;
  /**
   * Functions that are read on grids: the name that formulas use → two or three formulas of where to
   * read, counted in samples. The numbers come with the component; models of files have none.
   */
  readonly grids?: Readonly<Record<string, readonly string[]>>;
  readonly formulas: ModelFormulas;
  readonly edges: ModelEdges;
  readonly checks: readonly ModelCheck[];
}
