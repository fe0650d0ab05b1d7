import { expect } from 'vitest';
import { binaryFunctions, unaryFunctions, type BinaryName, type UnaryName } from '../../src/formula/functions.ts';
import { Graph, type NodeId } from '../../src/formula/graph.ts';
import { interpretInstruction } from '../../src/formula/javascript.ts';
import { lowerGraph, operandsOf, type Instruction, type Program } from '../../src/formula/lower.ts';
import { compileWasm } from '../../src/formula/wasm/kernel.ts';

/** Numbers in [0, 1) from a seed (a multiplicative congruence modulo 2^31 - 1: Park & Miller 1988). */
export function makeRandom(seed: number): () => number {
  let state = seed;
  return () => {
    state = (state * 48271) % 2147483647;
    return (state - 1) / 2147483646;
  };
}

const unaryNames = Object.keys(unaryFunctions) as UnaryName[];
const binaryNames = Object.keys(binaryFunctions) as BinaryName[];
const exponents = [-3, -2, -1, -0.5, 0.5, 1.5, 2, 3, 7, 0.3, -1.7];

/** A random expression of x, y and the parameter p, some steps deep. */
export function randomNode(graph: Graph, random: () => number, depth: number): NodeId {
  const pick = <T>(list: readonly T[]): T => list[Math.floor(random() * list.length)];
  const inner = (): NodeId => randomNode(graph, random, depth - 1 - Math.floor(2 * random()));
  if (depth <= 0) return pick([() => graph.variable('x'), () => graph.variable('y'), () => graph.parameter('p'), () => graph.constant(pick([0, 1, -1, 0.25, 3, -7.5]))])();
  const kind = random();
  if (kind < 0.2) return graph.add(inner(), inner());
  if (kind < 0.4) return graph.multiply(inner(), inner());
  if (kind < 0.5) return graph.divide(inner(), inner());
  if (kind < 0.6) return graph.power(inner(), pick(exponents));
  if (kind < 0.85) return graph.unary(pick(unaryNames), inner());
  if (kind < 0.95) return graph.binary(pick(binaryNames), inner(), inner());
  return graph.select(inner(), inner(), inner());
}

/**
 * Compares the back ends step by step: every step's WebAssembly value against the JavaScript one
 * made from the same WebAssembly operands, so that no step's condition magnifies another's last
 * digit. Returns how many values were compared.
 */
export function compareSteps(program: Program, parameters: Float64Array, lanes: readonly Float64Array[]): number {
  const all: Program = { ...program, outputs: program.instructions.map((_, index) => index) };
  const count = lanes[0].length;
  const out = all.outputs.map(() => new Float64Array(count));
  compileWasm(all).evaluate(count, parameters, lanes, out, []);
  for (let sample = 0; sample < count; sample++) {
    const values = out.map((column) => column[sample]);
    program.instructions.forEach((step, index) => {
      const wanted = interpretInstruction(step, values, parameters, lanes.map((lane) => lane[sample]), []);
      if (!agree(step, values[index], wanted)) {
        const operands = operandsOf(step).map((value) => values[value]);
        expect.fail(`${JSON.stringify(step)} of ${operands.join(', ')} is ${wanted} in JavaScript, ${values[index]} in WebAssembly`);
      }
    });
  }
  return count * program.instructions.length;
}

/** Arithmetic must agree exactly; functions to 1e-14, powers to what y ln x leaves; numbers near 1e-308 or 1e308 may be lost. */
function agree(step: Instruction, got: number, wanted: number): boolean {
  if (got === wanted || (Number.isNaN(got) && Number.isNaN(wanted))) return true;
  if (step.op !== 'unary' && step.op !== 'binary') return false;
  if (Math.abs(got) > 1e307 && Math.abs(wanted) > 1e307) return got > 0 === wanted > 0;
  const tolerance = step.op === 'binary' && step.name === 'pow' ? 4e-13 : 1e-14;
  return Math.abs(got - wanted) <= Math.max(tolerance * Math.abs(wanted), 1e-306);
}

/** Compares `count` random expressions, a hundred to a program. */
export function compareRandomExpressions(count: number, seed: number): number {
  const random = makeRandom(seed);
  let compared = 0;
  for (let done = 0; done < count; done += 100) {
    const graph = new Graph();
    const nodes = Array.from({ length: 100 }, () => randomNode(graph, random, 5));
    const program = lowerGraph(graph, nodes, ['x', 'y']);
    const draw = (): number => (random() < 0.8 ? 6 * random() - 3 : (random() < 0.5 ? -1 : 1) * 10 ** (24 * random() - 12));
    const lanes = [0, 1].map(() => Float64Array.from({ length: 3 }, draw));
    compared += compareSteps(program, Float64Array.from(program.parameters, draw), lanes);
  }
  return compared;
}
