import { int, vector as v, type Int, type Vector } from './code.ts';
import type { FunctionWriter } from './function.ts';

/** What tables that a module reads have in common: see `Table` of math/table.ts. */
export interface TableShape {
  readonly pieces: number;
  readonly degree: number;
}

/** The tabulated function at u, held to [0, 1], of two samples: each lane reads its own piece. */
export function readTable(w: FunctionWriter, { pieces, degree }: TableShape, address: Int, u: Vector): Vector {
  const held = v.lesser(w.constant(1), v.greater(w.constant(0), u));
  const x = w.let(v.multiply(held, w.constant(pieces)));
  const piece = w.let(v.lesser(w.constant(pieces - 1), v.floor(x)));
  const t = w.let(v.subtract(v.multiply(w.constant(2), v.subtract(x, piece)), w.constant(1)));
  const whole = w.let(v.truncate(piece));
  const bytes = int.constant(8 * (degree + 1));
  const [first, second] = ([0, 1] as const).map((lane) => w.let(int.add(address, int.multiply(v.laneInt(whole, lane), bytes))));
  const pair = (power: number): readonly [Vector, Vector] => {
    const [a, b] = [w.let(v.load(first, 8 * power)), w.let(v.load(second, 8 * power))];
    return [v.shuffle(a, 0, b, 0), v.shuffle(a, 1, b, 1)];
  };
  // Coefficients come two at a time; an even degree leaves one that is read alone.
  let sum: Vector | undefined;
  let power = degree;
  if (degree % 2 === 0) {
    sum = w.let(v.shuffle(v.loadSplat(first, 8 * degree), 0, v.loadSplat(second, 8 * degree), 0));
    power--;
  }
  for (; power > 0; power -= 2) {
    const [low, high] = pair(power - 1);
    sum = w.let(sum ? v.add(v.multiply(sum, t), high) : high);
    sum = w.let(v.add(v.multiply(sum, t), low));
  }
  return v.select(v.equal(u, u), sum ?? w.constant(0), u);
}
