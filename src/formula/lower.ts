import type { BinaryName, UnaryName } from './functions.ts';
import type { Factor, Graph, NodeId, Term } from './graph.ts';
import { shareFactors, type SharedFactors } from './share-factors.ts';

/** Index of a value in a program: the result of the instruction at that index. */
export type Value = number;

/** One step of a program; operands are earlier values. Both back ends are written from these. */
export type Instruction =
  | { readonly op: 'constant'; readonly value: number }
  | { readonly op: 'parameter'; readonly index: number }
  | { readonly op: 'lane'; readonly index: number }
  | { readonly op: 'add' | 'subtract' | 'multiply' | 'divide'; readonly left: Value; readonly right: Value }
  | { readonly op: 'negate' | 'sqrt'; readonly argument: Value }
  | { readonly op: 'unary'; readonly name: UnaryName; readonly argument: Value }
  | { readonly op: 'binary'; readonly name: BinaryName; readonly left: Value; readonly right: Value }
  | { readonly op: 'select'; readonly condition: Value; readonly yes: Value; readonly no: Value }
  | { readonly op: 'table'; readonly table: number; readonly order: number; readonly argument: Value }
  | { readonly op: 'grid'; readonly grid: number; readonly orders: readonly number[]; readonly coordinates: readonly Value[] };

/** A straight-line program: what it takes, its steps, and which values it gives. */
export interface Program {
  /** Names of the run-time parameters, by index. */
  readonly parameters: readonly string[];
  /** Names of the per-sample inputs, by index. */
  readonly lanes: readonly string[];
  readonly tables: readonly string[];
  readonly grids: readonly string[];
  readonly instructions: readonly Instruction[];
  /** Per instruction: whether it differs between samples; the others are computed once a call. */
  readonly varying: readonly boolean[];
  readonly outputs: readonly Value[];
}

/** How variables that are no lanes (r, phi) follow from lanes, as nodes of the same graph. */
export type Substitution = ReadonlyMap<NodeId, NodeId>;

/**
 * Turns the nodes under `outputs` into a straight-line program. Products gather their factors
 * that are the same for all samples, powers become multiplications and roots, and each base is
 * inverted once. Throws where a variable is neither a lane nor substituted.
 */
export function lowerGraph(
  graph: Graph,
  outputs: readonly NodeId[],
  lanes: readonly string[],
  substitution: Substitution = new Map(),
): Program {
  const lowering = new Lowering(graph, lanes, substitution);
  return lowering.program(outputs);
}

class Lowering {
  private readonly instructions: Instruction[] = [];
  private readonly varying: boolean[] = [];
  private readonly known = new Map<string, Value>();
  private readonly lowered = new Map<NodeId, Value>();
  private readonly parameters: string[] = [];
  private readonly tables: string[] = [];
  private readonly itemValues: Value[] = [];
  private readonly grids: string[] = [];
  private shared: SharedFactors = { items: [], products: new Map() };

  constructor(
    private readonly graph: Graph,
    private readonly lanes: readonly string[],
    private readonly substitution: Substitution,
  ) {}

  program(outputs: readonly NodeId[]): Program {
    this.shared = shareFactors(this.graph, outputs, (id) => this.substitution.get(id) ?? id);
    const values = outputs.map((id) => this.lower(id));
    return {
      parameters: this.parameters,
      lanes: this.lanes,
      tables: this.tables,
      grids: this.grids,
      instructions: this.instructions,
      varying: this.varying,
      outputs: values,
    };
  }

  private lower(id: NodeId): Value {
    const done = this.lowered.get(id);
    if (done !== undefined) return done;
    const substitute = this.substitution.get(id);
    const value = substitute !== undefined ? this.lower(substitute) : this.lowerNode(id);
    this.lowered.set(id, value);
    return value;
  }

  private lowerNode(id: NodeId): Value {
    const node = this.graph.node(id);
    switch (node.kind) {
      case 'constant':
        return this.constant(node.value);
      case 'variable': {
        const index = this.lanes.indexOf(node.name);
        if (index < 0) throw new Error(`variable ${node.name} is neither a lane nor substituted`);
        return this.emit({ op: 'lane', index }, true);
      }
      case 'parameter':
        return this.emit({ op: 'parameter', index: indexIn(this.parameters, node.name) }, false);
      case 'sum':
        return this.sum(node.constant, node.terms);
      case 'product':
        return this.product(id, node.coefficient, node.factors);
      case 'unary':
        return this.emit({ op: 'unary', name: node.name, argument: this.lower(node.argument) });
      case 'binary':
        return this.emit({ op: 'binary', name: node.name, left: this.lower(node.left), right: this.lower(node.right) });
      case 'select': {
        const [condition, yes, no] = [node.condition, node.yes, node.no].map((part) => this.lower(part));
        return this.emit({ op: 'select', condition, yes, no });
      }
      case 'table':
        return this.emit({ op: 'table', table: indexIn(this.tables, node.table), order: node.order, argument: this.lower(node.argument) });
      case 'grid': {
        const coordinates = node.coordinates.map((coordinate) => this.lower(coordinate));
        return this.emit({ op: 'grid', grid: indexIn(this.grids, node.grid), orders: node.orders, coordinates });
      }
    }
  }

  private constant(value: number): Value {
    return this.emit({ op: 'constant', value }, false);
  }

  private sum(constant: number, terms: readonly Term[]): Value {
    const uniform: Term[] = [];
    const varying: Term[] = [];
    for (const term of terms) (this.graph.isVarying(term[1]) ? varying : uniform).push(term);
    let total = this.accumulate(undefined, uniform);
    if (constant !== 0) total = total === undefined ? this.constant(constant) : this.add(total, this.constant(constant));
    return this.accumulate(total, varying) ?? this.constant(0);
  }

  /** total + Σ coefficient·node, with plus and minus signs where coefficients are ±1. */
  private accumulate(total: Value | undefined, terms: readonly Term[]): Value | undefined {
    let sum = total;
    for (const [coefficient, id] of terms) {
      const { size, sign } = this.signed(coefficient, id);
      if (sum === undefined) sum = sign < 0 ? this.emit({ op: 'negate', argument: size }) : size;
      else sum = this.emit({ op: sign < 0 ? 'subtract' : 'add', left: sum, right: size });
    }
    return sum;
  }

  private signed(coefficient: number, id: NodeId): { size: Value; sign: number } {
    const value = this.lower(id);
    const magnitude = Math.abs(coefficient);
    const size = magnitude === 1 ? value : this.multiply(this.constant(magnitude), value);
    return { size, sign: coefficient < 0 ? -1 : 1 };
  }

  private product(id: NodeId, coefficient: number, factors: readonly Factor[]): Value {
    const uniform = factors.filter(([base]) => !this.graph.isVarying(base)).map(([base, exponent]) => this.power(this.lower(base), exponent));
    // Products made while lowering are not planned: their factors are taken as they are.
    const varying = factors.filter(([base]) => this.graph.isVarying(base));
    const planned = this.shared.products.get(id)?.map((index) => this.item(index)) ?? varying.map(([base, exponent]) => this.power(this.lower(base), exponent));
    let total: Value | undefined = Math.abs(coefficient) === 1 ? undefined : this.constant(Math.abs(coefficient));
    for (const value of [...uniform, ...planned]) total = total === undefined ? value : this.multiply(total, value);
    if (total === undefined) return this.constant(coefficient);
    return coefficient < 0 ? this.emit({ op: 'negate', argument: total }) : total;
  }

  private item(index: number): Value {
    const known = this.itemValues[index];
    if (known !== undefined) return known;
    const item = this.shared.items[index];
    const value = item.kind === 'power' ? this.power(this.lower(item.factor[0]), item.factor[1]) : this.multiply(this.item(item.first), this.item(item.second));
    this.itemValues[index] = value;
    return value;
  }

  /** base^exponent: whole and half powers by multiplication, one division a base. */
  private power(base: Value, exponent: number): Value {
    const twice = 2 * exponent;
    if (!Number.isInteger(twice) || Math.abs(twice) > 64) {
      return this.emit({ op: 'binary', name: 'pow', left: base, right: this.constant(exponent) });
    }
    if (exponent < 0) return this.power(this.emit({ op: 'divide', left: this.constant(1), right: base }), -exponent);
    if (exponent === 1) return base;
    if (twice % 2 !== 0) {
      const root = this.emit({ op: 'sqrt', argument: base });
      return exponent === 0.5 ? root : this.multiply(this.power(base, exponent - 0.5), root);
    }
    const half = this.power(base, Math.floor(exponent / 2));
    const squared = this.multiply(half, half);
    return exponent % 2 === 0 ? squared : this.multiply(squared, base);
  }

  private add(left: Value, right: Value): Value {
    return this.emit({ op: 'add', left, right });
  }

  private multiply(left: Value, right: Value): Value {
    return this.emit({ op: 'multiply', left, right });
  }

  private emit(instruction: Instruction, varying = operandsOf(instruction).some((value) => this.varying[value])): Value {
    const key = keyOf(instruction);
    const found = this.known.get(key);
    if (found !== undefined) return found;
    const value = this.instructions.push(instruction) - 1;
    this.varying.push(varying);
    this.known.set(key, value);
    return value;
  }
}

/** Equal for equal instructions only. */
function keyOf(instruction: Instruction): string {
  switch (instruction.op) {
    case 'constant':
      return Object.is(instruction.value, -0) ? 'constant -0' : `constant ${instruction.value}`;
    case 'parameter':
    case 'lane':
      return `${instruction.op} ${instruction.index}`;
    case 'table':
      return `table ${instruction.table} ${instruction.order} ${instruction.argument}`;
    case 'grid':
      return `grid ${instruction.grid} ${instruction.orders.join(' ')} ${instruction.coordinates.join(' ')}`;
    case 'unary':
    case 'binary':
      return `${instruction.name} ${operandsOf(instruction).join(' ')}`;
    default:
      return `${instruction.op} ${operandsOf(instruction).join(' ')}`;
  }
}

/** The earlier values an instruction reads. */
export function operandsOf(instruction: Instruction): readonly Value[] {
  switch (instruction.op) {
    case 'constant':
    case 'parameter':
    case 'lane':
      return [];
    case 'add':
    case 'subtract':
    case 'multiply':
    case 'divide':
    case 'binary':
      return [instruction.left, instruction.right];
    case 'negate':
    case 'sqrt':
    case 'unary':
    case 'table':
      return [instruction.argument];
    case 'grid':
      return instruction.coordinates;
    case 'select':
      return [instruction.condition, instruction.yes, instruction.no];
  }
}

function indexIn(names: string[], name: string): number {
  const found = names.indexOf(name);
  return found >= 0 ? found : names.push(name) - 1;
}
