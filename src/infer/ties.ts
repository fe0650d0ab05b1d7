import { buildFormula } from '../formula/build.ts';
import { Graph } from '../formula/graph.ts';
import { interpretProgram } from '../formula/javascript.ts';
import { lowerGraph } from '../formula/lower.ts';
import { scenePath } from '../scene/paths.ts';
import type { Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity } from '../units/quantity.ts';
import type { FormulaText } from './study-types.ts';

/** A number that follows from others of the scene by a formula. */
export interface Tie {
  /** The path that it sets, or the name of a derived number. */
  readonly name: string;
  /** Unit of its values where it is derived; those of a path are in the path's shown unit. */
  readonly unit: string;
  /** Its value for a scene; numbers enter the formula in their paths' shown units. */
  readonly value: (scene: Scene) => number;
}

/** Compiles a tie or derived number. Throws InputError, placed, for unknown paths and wrong formulas. */
export function compileTie(text: FormulaText, scene: Scene): Tie {
  const placed = <T>(work: () => T): T => {
    try {
      return work();
    } catch (error) {
      throw error instanceof InputError ? error.at(text.place) : error;
    }
  };
  const graph = new Graph();
  const names = Object.keys(text.where);
  const node = placed(() => buildFormula(graph, text.formula, new Map(names.map((name) => [name, graph.parameter(name)]))));
  const program = lowerGraph(graph, [node], []);
  for (const name of names) placed(() => scenePath(scene, text.where[name]));
  return {
    name: text.name,
    unit: text.unit,
    value: (given) => {
      const numbers = Float64Array.from(program.parameters, (name) => shownValue(given, text.where[name]));
      return interpretProgram(program, numbers, [])[0];
    },
  };
}

/** The number at a path, in its shown unit. */
export function shownValue(scene: Scene, path: string): number {
  const target = scenePath(scene, path);
  return convertQuantity(target.get(), target.unit, target.shownUnit);
}

/** A scene with its ties followed, in order. Throws InputError where a value is not allowed. */
export function followTies(scene: Scene, ties: readonly Tie[]): Scene {
  return ties.reduce((changed, tie) => {
    const target = scenePath(changed, tie.name);
    return target.set(changed, convertQuantity(tie.value(changed), target.shownUnit, target.unit));
  }, scene);
}
