import { operandsOf, type Instruction, type Program, type Value } from '../lower.ts';
import { int, vector as v, type Int, type Vector } from './code.ts';
import { gridReader, gridRecordBytes } from './grid.ts';
import type { FunctionWriter } from './function.ts';
import type { Callee, ModuleWriter } from './module.ts';
import { readTable, type TableShape } from './table.ts';
import { comparisonMask, VectorMaths, type Comparison } from './vector-maths.ts';

/** Where a program finds its run-time values in memory, and how its steps are written. */
export interface PlacedProgram {
  /** Address of the parameters, f64 each, in the program's order. */
  readonly parameters: number;
  /** Address of one i32 per table and order: where its coefficients lie. */
  readonly tables: number;
  /** Derivatives of each table that the program reads, beside its value. */
  readonly tableOrders: number;
  /** Address of the records of the grids. */
  readonly grids: number;
  /** Function without arguments: computes all that does not differ between samples. Call it first. */
  readonly prepare: Callee;
  /**
   * Writes what a loop over samples needs before it; the function returned writes the steps for
   * two samples within the loop and gives the values of the outputs.
   */
  begin(w: FunctionWriter): (lanes: readonly Vector[]) => readonly Vector[];
}

/** Lays out a program in a module. All tables share one shape. */
export function placeProgram(module: ModuleWriter, program: Program, shape: TableShape): PlacedProgram {
  const parameters = module.reserve(8 * program.parameters.length);
  const tableOrders = 1 + Math.max(0, ...program.instructions.map((step) => (step.op === 'table' ? step.order : 0)));
  const tables = module.reserve(4 * tableOrders * program.tables.length);
  const grids = module.reserve(gridRecordBytes * program.grids.length);
  const readings = gridReadings(module, program);
  const kept = keptValues(program);
  const reach = reachOf(program);
  const keptAt = new Map(kept.map((value) => [value, module.reserve(16)]));
  const writer = (w: FunctionWriter, lanes: readonly Vector[]): StepWriter => new StepWriter(w, lanes, { parameters, tables, tableOrders, shape, grids, readings }, reach);
  const prepare = module.define([], [], (w) => {
    const steps = writer(w, []);
    program.instructions.forEach((step, value) => {
      if (program.varying[value]) return;
      steps.write(step, value);
      const address = keptAt.get(value);
      if (address !== undefined) w.store(int.constant(0), address, steps.value(value));
    });
  });
  return {
    parameters,
    tables,
    tableOrders,
    grids,
    prepare,
    begin: (w) => {
      const known = new Map<Value, Vector>();
      for (const [value, address] of keptAt) {
        const step = program.instructions[value];
        known.set(value, step.op === 'constant' ? w.constant(step.value) : w.let(v.load(int.constant(0), address)));
      }
      return (lanes) => {
        const steps = writer(w, lanes);
        for (const [value, code] of known) steps.know(value, code);
        program.instructions.forEach((step, value) => {
          if (program.varying[value]) steps.write(step, value);
        });
        return program.outputs.map((value) => steps.value(value));
      };
    },
  };
}

/** Values that are the same for all samples and that samples or outputs read. */
function keptValues(program: Program): readonly Value[] {
  const kept = new Set<Value>();
  const keep = (value: Value): void => {
    if (!program.varying[value]) kept.add(value);
  };
  program.instructions.forEach((step, value) => {
    if (program.varying[value]) operandsOf(step).forEach(keep);
  });
  program.outputs.forEach(keep);
  return [...kept];
}

/** Values read so many steps later are held in memory: registers would not last. */
const farReach = 1000;

/** How many steps after each step its value is last read. */
function reachOf(program: Program): readonly number[] {
  const reach = program.instructions.map(() => 0);
  program.instructions.forEach((step, index) => {
    for (const value of operandsOf(step)) reach[value] = index - value;
  });
  for (const value of program.outputs) reach[value] = program.instructions.length - value;
  return reach;
}

interface Places {
  readonly parameters: number;
  readonly tables: number;
  readonly tableOrders: number;
  readonly shape: TableShape;
  readonly grids: number;
  readonly readings: ReadonlyMap<string, GridReading>;
}

type GridStep = Instruction & { readonly op: 'grid' };

/** All that a program wants of one grid at one place: read together. */
interface GridReading {
  readonly orders: readonly (readonly number[])[];
  /** Where the results of two samples go, order by order. */
  readonly results: number;
}

function readingKey({ grid, coordinates }: GridStep): string {
  return [grid, ...coordinates].join();
}

function gridReadings(module: ModuleWriter, program: Program): ReadonlyMap<string, GridReading> {
  const orders = new Map<string, (readonly number[])[]>();
  for (const step of program.instructions) {
    if (step.op !== 'grid') continue;
    const key = readingKey(step);
    orders.set(key, [...(orders.get(key) ?? []), step.orders]);
  }
  return new Map([...orders].map(([key, wanted]) => [key, { orders: wanted, results: module.reserve(16 * wanted.length) }]));
}

/** Writes instructions one by one and remembers where their values are. */
class StepWriter {
  private readonly values: Vector[] = [];
  private readonly masks = new Map<Value, Vector>();
  private readonly read = new Set<GridReading>();
  private readonly maths: VectorMaths;

  constructor(
    private readonly w: FunctionWriter,
    private readonly lanes: readonly Vector[],
    private readonly places: Places,
    /** How many steps after each its value is last read. */
    private readonly reach: readonly number[],
  ) {
    this.maths = new VectorMaths(w);
  }

  value(index: Value): Vector {
    return this.values[index];
  }

  know(index: Value, code: Vector): void {
    this.values[index] = code;
  }

  write(step: Instruction, index: Value): void {
    const code = this.code(step, index);
    const isPlain = step.op === 'lane' || step.op === 'constant' || step.op === 'grid';
    this.values[index] = isPlain ? code : isCostly(step) || this.reach[index] > farReach ? this.w.pin(code) : this.w.let(code);
  }

  private code(step: Instruction, index: Value): Vector {
    const { values } = this;
    switch (step.op) {
      case 'constant':
        return this.w.constant(step.value);
      case 'parameter':
        return v.loadSplat(int.constant(0), this.places.parameters + 8 * step.index);
      case 'lane':
        return this.lanes[step.index];
      case 'add':
        return v.add(values[step.left], values[step.right]);
      case 'subtract':
        return v.subtract(values[step.left], values[step.right]);
      case 'multiply':
        return v.multiply(values[step.left], values[step.right]);
      case 'divide':
        return v.divide(values[step.left], values[step.right]);
      case 'negate':
        return v.negate(values[step.argument]);
      case 'sqrt':
        return v.sqrt(values[step.argument]);
      case 'unary':
        return this.maths.unary(step.name, values[step.argument], step.argument);
      case 'binary':
        return this.binary(step, index);
      case 'select':
        return v.select(this.mask(step.condition), values[step.yes], values[step.no]);
      case 'table': {
        const pointer: Int = int.load(int.constant(0), this.places.tables + 4 * (step.table * this.places.tableOrders + step.order));
        return readTable(this.w, this.places.shape, this.w.let(pointer), values[step.argument]);
      }
      case 'grid':
        return this.grid(step);
    }
  }

  /** Reads all orders of a grid where the first of them is wanted; each stays in memory. */
  private grid(step: GridStep): Vector {
    const reading = this.places.readings.get(readingKey(step));
    if (!reading) throw new Error('a grid is read that the program does not name');
    const { orders, results } = reading;
    if (!this.read.has(reading)) {
      this.read.add(reading);
      const reader = gridReader(this.w.module, orders);
      const record = int.constant(this.places.grids + gridRecordBytes * step.grid);
      for (const lane of [0, 1] as const) {
        this.w.run(reader, record, int.constant(results + 8 * lane), ...step.coordinates.map((value) => v.lane(this.values[value], lane)));
      }
    }
    return v.load(int.constant(0), results + 16 * orders.findIndex((known) => known.join() === step.orders.join()));
  }

  private binary({ name, left, right }: Instruction & { op: 'binary' }, index: Value): Vector {
    const [a, b] = [this.values[left], this.values[right]];
    if (!isComparison(name)) return this.maths.binary(name, a, b);
    const mask = this.w.let(comparisonMask(name, a, b));
    this.masks.set(index, mask);
    return v.and(mask, this.w.constant(1));
  }

  private mask(condition: Value): Vector {
    return this.masks.get(condition) ?? v.notEqual(this.values[condition], this.w.constant(0));
  }
}

function isComparison(name: string): name is Comparison {
  return name === 'less' || name === 'lessOrEqual' || name === 'equal';
}

/** Steps of many instructions, whose results are held in memory. */
function isCostly(step: Instruction): boolean {
  if (step.op === 'unary') return step.name !== 'abs' && step.name !== 'sign';
  return step.op === 'table' || (step.op === 'binary' && !isComparison(step.name));
}
