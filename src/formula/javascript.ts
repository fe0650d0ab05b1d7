import { binaryFunctions, unaryFunctions } from './functions.ts';
import type { Instruction, Program } from './lower.ts';
import { evaluateGrid, type SplineGrid } from '../math/spline-grid.ts';
import { evaluateTable, type Table } from '../math/table.ts';

/** A program made into a function: the oracle of the other back ends, and their fallback. */
export interface Kernel {
  /**
   * Evaluates `count` samples: lanes[l][k] in, outputs[o][k] out. Parameters in the order of
   * `program.parameters`, tables in that of `program.tables`, grids in that of `program.grids`.
   */
  evaluate(
    count: number,
    parameters: Float64Array,
    lanes: readonly Float64Array[],
    outputs: readonly Float64Array[],
    tables: readonly Table[],
    grids?: readonly SplineGrid[],
  ): void;
}

type Generated = (
  count: number,
  parameters: Float64Array,
  lanes: readonly Float64Array[],
  outputs: readonly Float64Array[],
  tables: readonly Table[],
  grids: readonly SplineGrid[],
  functions: Record<string, unknown>,
) => void;

const nativeUnary = new Set(['abs', 'sign', 'exp', 'expm1', 'log', 'sin', 'cos', 'tan', 'asin', 'acos', 'atan', 'sinh', 'cosh', 'tanh']);
const nativeBinary = new Set(['min', 'max', 'atan2', 'pow']);

/**
 * Writes a program as one JavaScript function with a loop over samples. The text holds only
 * names made here (v0, v1, …) and numbers: no formula text reaches the compiler.
 */
export function compileJavaScript(program: Program): Kernel {
  const before: string[] = [];
  const within: string[] = [];
  program.instructions.forEach((instruction, value) => {
    (program.varying[value] ? within : before).push(`const v${value} = ${expression(instruction)};`);
  });
  const stores = program.outputs.map((value, index) => `o${index}[k] = v${value};`);
  const text = [
    '"use strict";',
    'const { erf, incompleteGamma2, evaluateTable, evaluateGrid } = functions;',
    ...program.lanes.map((_, index) => `const l${index} = lanes[${index}];`),
    ...program.outputs.map((_, index) => `const o${index} = outputs[${index}];`),
    ...before,
    'for (let k = 0; k < count; k++) {',
    ...within,
    ...stores,
    '}',
  ].join('\n');
  const generated = new Function('count', 'parameters', 'lanes', 'outputs', 'tables', 'grids', 'functions', text) as Generated;
  const functions = { erf: unaryFunctions.erf, incompleteGamma2: unaryFunctions.incompleteGamma2, evaluateTable, evaluateGrid };
  return {
    evaluate: (count, parameters, lanes, outputs, tables, grids = []) => generated(count, parameters, lanes, outputs, tables, grids, functions),
  };
}

function expression(instruction: Instruction): string {
  switch (instruction.op) {
    case 'constant':
      return numberText(instruction.value);
    case 'parameter':
      return `parameters[${instruction.index}]`;
    case 'lane':
      return `l${instruction.index}[k]`;
    case 'add':
      return `v${instruction.left} + v${instruction.right}`;
    case 'subtract':
      return `v${instruction.left} - v${instruction.right}`;
    case 'multiply':
      return `v${instruction.left} * v${instruction.right}`;
    case 'divide':
      return `v${instruction.left} / v${instruction.right}`;
    case 'negate':
      return `-v${instruction.argument}`;
    case 'sqrt':
      return `Math.sqrt(v${instruction.argument})`;
    case 'unary':
      if (instruction.name === 'sech') return `1 / Math.cosh(v${instruction.argument})`;
      return `${nativeUnary.has(instruction.name) ? 'Math.' : ''}${instruction.name}(v${instruction.argument})`;
    case 'binary':
      return binaryExpression(instruction);
    case 'select':
      return `v${instruction.condition} !== 0 ? v${instruction.yes} : v${instruction.no}`;
    case 'table':
      return `evaluateTable(tables[${instruction.table}], ${instruction.order}, v${instruction.argument})`;
    case 'grid':
      return `evaluateGrid(grids[${instruction.grid}], [${instruction.orders.join()}], ${instruction.coordinates.map((value) => `v${value}`).join()})`;
  }
}

function binaryExpression({ name, left, right }: Instruction & { op: 'binary' }): string {
  if (nativeBinary.has(name)) return `Math.${name}(v${left}, v${right})`;
  const comparison = { less: '<', lessOrEqual: '<=', equal: '===' }[name as 'less' | 'lessOrEqual' | 'equal'];
  return `(v${left} ${comparison} v${right} ? 1 : 0)`;
}

function numberText(value: number): string {
  return value < 0 || Object.is(value, -0) ? `(${value})` : String(value);
}

/** Evaluates a program step by step, without generating code: slow, for single points and tests. */
export function interpretProgram(program: Program, parameters: Float64Array, lanes: readonly number[], tables: readonly Table[] = [], grids: readonly SplineGrid[] = []): number[] {
  const values: number[] = [];
  for (const instruction of program.instructions) values.push(interpretInstruction(instruction, values, parameters, lanes, tables, grids));
  return program.outputs.map((value) => values[value]);
}

/** The value of one step from those of earlier steps. */
export function interpretInstruction(
  instruction: Instruction,
  v: readonly number[],
  parameters: Float64Array,
  lanes: readonly number[],
  tables: readonly Table[],
  grids: readonly SplineGrid[] = [],
): number {
  switch (instruction.op) {
    case 'constant':
      return instruction.value;
    case 'parameter':
      return parameters[instruction.index];
    case 'lane':
      return lanes[instruction.index];
    case 'add':
      return v[instruction.left] + v[instruction.right];
    case 'subtract':
      return v[instruction.left] - v[instruction.right];
    case 'multiply':
      return v[instruction.left] * v[instruction.right];
    case 'divide':
      return v[instruction.left] / v[instruction.right];
    case 'negate':
      return -v[instruction.argument];
    case 'sqrt':
      return Math.sqrt(v[instruction.argument]);
    case 'unary':
      return unaryFunctions[instruction.name](v[instruction.argument]);
    case 'binary':
      return binaryFunctions[instruction.name](v[instruction.left], v[instruction.right]);
    case 'select':
      return v[instruction.condition] !== 0 ? v[instruction.yes] : v[instruction.no];
    case 'table':
      return evaluateTable(tables[instruction.table], instruction.order, v[instruction.argument]);
    case 'grid': {
      const [first, second, third] = instruction.coordinates.map((value) => v[value]);
      return evaluateGrid(grids[instruction.grid], instruction.orders, first, second, third);
    }
  }
}
