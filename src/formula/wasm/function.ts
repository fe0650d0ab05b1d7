import { ByteSink } from './byte-sink.ts';
import { int, leaf, vector, writeCode, type Code, type Int, type ValueType, type Vector } from './code.ts';
import { instructions } from './instructions.ts';
import { unsigned } from './leb128.ts';
import type { Callee, ModuleWriter } from './module.ts';

/** A local that is written more than once. */
export interface Variable<T extends ValueType> extends Code<T> {
  set(value: Code<T>): void;
}

const typeCodes: Readonly<Record<ValueType, number>> = { i32: 0x7f, i64: 0x7e, f64: 0x7c, v128: 0x7b };
const stores: Readonly<Record<'i32' | 'f64' | 'v128', readonly number[]>> = {
  i32: [...instructions['i32.store'], 2],
  f64: [...instructions['f64.store'], 3],
  v128: [...instructions['v128.store'], 4],
};

const control = { block: 0x02, loop: 0x03, if: 0x04, else: 0x05, end: 0x0b, br: 0x0c, brIf: 0x0d, return: 0x0f, call: 0x10, localGet: 0x20, localSet: 0x21, none: 0x40 } as const;

/** Most numbers are coefficients that functions share. */
const constants = new Map<number | string, Vector>();

/** The body of one function as it is being written, statement by statement. */
export class FunctionWriter {
  private readonly body = new ByteSink();
  private readonly locals: ValueType[] = [];

  constructor(
    readonly module: ModuleWriter,
    private readonly parameters: readonly ValueType[],
  ) {}

  parameter<T extends ValueType>(index: number, type: T): Code<T> {
    return leaf(type, [control.localGet, ...unsigned(index)]);
  }

  /** Computes a value now and names it: the code returned reads it again. */
  let<T extends ValueType>(value: Code<T>): Code<T> {
    const index = this.addLocal(value.type);
    this.assign(value, index);
    return leaf(value.type, [control.localGet, ...index]);
  }

  /**
   * Computes a value now, keeps it in memory and reads it anew at each use. Optimizing compilers
   * move plain expressions far from where they are written and then run out of registers; a store
   * holds them in place.
   */
  pin(value: Vector): Vector {
    const address = this.module.reserve(16);
    this.store(int.constant(0), address, value);
    return vector.load(int.constant(0), address);
  }

  /** A new local, zero at first. */
  variable<T extends ValueType>(type: T, start?: Code<T>): Variable<T> {
    const index = this.addLocal(type);
    if (start) this.assign(start, index);
    return { ...leaf(type, [control.localGet, ...index]), set: (value: Code<T>): void => this.assign(value, index) };
  }

  /** A new local's index, encoded. */
  private addLocal(type: ValueType): readonly number[] {
    return unsigned(this.parameters.length + this.locals.push(type) - 1);
  }

  private assign(value: Code<ValueType>, index: readonly number[]): void {
    this.push(value, [control.localSet, ...index]);
  }

  /** A number in both lanes. */
  constant(value: number): Vector {
    const key = Object.is(value, -0) ? '-0' : value;
    let code = constants.get(key);
    if (!code) constants.set(key, (code = vector.constant(bitsOf(value))));
    return code;
  }

  store(address: Int, offset: number, value: Code<'i32' | 'f64' | 'v128'>): void {
    this.push(address, value, stores[value.type], unsigned(offset));
  }

  /** Calls a function of one result. */
  call<T extends ValueType>(callee: Callee, type: T, ...values: readonly Code<ValueType>[]): Code<T> {
    return { type, operands: values, instruction: [control.call, ...unsigned(callee.index)] };
  }

  /** Calls a function for what it does, or for two results, which are named. */
  run(callee: Callee, ...values: readonly Code<ValueType>[]): readonly Code<ValueType>[] {
    const results = callee.results.map((type) => this.variable(type));
    this.push(...values, [control.call, ...unsigned(callee.index)]);
    for (const result of [...results].reverse()) this.push([control.localSet, ...result.instruction.slice(1)]);
    return results;
  }

  when(condition: Int, then: () => void, otherwise?: () => void): void {
    this.push(condition, [control.if, control.none]);
    then();
    if (otherwise) {
      this.push([control.else]);
      otherwise();
    }
    this.push([control.end]);
  }

  /** Runs `step` while the condition, evaluated before every turn, holds. */
  repeatWhile(condition: () => Int, step: () => void): void {
    this.push([control.block, control.none, control.loop, control.none], condition(), [...instructions['i32.eqz'], control.brIf, 1]);
    step();
    this.push([control.br, 0, control.end, control.end]);
  }

  /** Runs `step` for a rising number from `from` up to but without `to`; at least once. */
  count(from: Int, to: Int, by: number, step: (index: Int) => void): void {
    const index = this.variable('i32', from);
    this.push([control.loop, control.none]);
    step(index);
    index.set(int.add(index, int.constant(by)));
    this.push(int.less(index, to), [control.brIf, 0, control.end]);
  }

  /** Leaves the function with these results. */
  leave(...results: readonly Code<ValueType>[]): void {
    this.push(...results, [control.return]);
  }

  /** The function's bytes in the code section; the last statement must have been `leave`, or there are no results. */
  finish(): Uint8Array {
    const groups: [count: number, type: ValueType][] = [];
    for (const type of this.locals) {
      const last = groups.at(-1);
      if (last && last[1] === type) last[0]++;
      else groups.push([1, type]);
    }
    this.push([control.end]);
    const [head, body] = [new ByteSink(), this.body.bytes()];
    head.append(unsigned(groups.length));
    for (const [count, type] of groups) head.append([...unsigned(count), typeCodes[type]]);
    const whole = new ByteSink();
    whole.append(unsigned(head.bytes().length + body.length));
    whole.append(head.bytes());
    whole.append(body);
    return whole.bytes();
  }

  private push(...parts: readonly (Code<ValueType> | readonly number[])[]): void {
    for (const part of parts) {
      if ('instruction' in part) writeCode(this.body, part);
      else this.body.append(part);
    }
  }
}

function bitsOf(value: number): bigint {
  return new BigUint64Array(Float64Array.of(value).buffer)[0];
}
