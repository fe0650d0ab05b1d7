import { erf, incompleteGamma2 } from '../math/special.ts';

/** Functions of one argument. `incompleteGamma2(u)` = 1 - (1 + u) e^-u, kept accurate at u → 0. */
export const unaryFunctions = {
  abs: Math.abs,
  sign: Math.sign,
  exp: Math.exp,
  expm1: Math.expm1,
  log: Math.log,
  sin: Math.sin,
  cos: Math.cos,
  tan: Math.tan,
  asin: Math.asin,
  acos: Math.acos,
  atan: Math.atan,
  sinh: Math.sinh,
  cosh: Math.cosh,
  tanh: Math.tanh,
  sech: (u: number) => 1 / Math.cosh(u),
  erf,
  incompleteGamma2,
} satisfies Record<string, (argument: number) => number>;

export type UnaryName = keyof typeof unaryFunctions;

/** Functions of two arguments that the graph keeps as they are. */
export const binaryFunctions = {
  min: Math.min,
  max: Math.max,
  atan2: Math.atan2,
  pow: Math.pow,
  less: (a: number, b: number) => (a < b ? 1 : 0),
  lessOrEqual: (a: number, b: number) => (a <= b ? 1 : 0),
  equal: (a: number, b: number) => (a === b ? 1 : 0),
} satisfies Record<string, (a: number, b: number) => number>;

export type BinaryName = keyof typeof binaryFunctions;

/** Names as written in formulas, with how many arguments each takes; `diff(f, v)` is ∂f/∂v. */
const written: Readonly<Record<string, number>> = {
  abs: 1, sign: 1, sqrt: 1, exp: 1, expm1: 1, log: 1, sin: 1, cos: 1, tan: 1, asin: 1, acos: 1, atan: 1,
  sinh: 1, cosh: 1, tanh: 1, sech: 1, erf: 1, incompleteGamma2: 1,
  atan2: 2, min: 2, max: 2, pow: 2, hypot: 2, diff: 2,
};

/** The function of that name, or undefined. */
export function findFunction(name: string): { readonly arity: number } | undefined {
  return Object.hasOwn(written, name) ? { arity: written[name] } : undefined;
}

/** Every function name that a formula may use. */
export function functionNames(): readonly string[] {
  return Object.keys(written);
}
