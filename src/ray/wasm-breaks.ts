import { float as f, int, type Float, type Int } from '../formula/wasm/code.ts';
import type { FunctionWriter } from '../formula/wasm/function.ts';
import type { Callee, ModuleWriter } from '../formula/wasm/module.ts';
import { axisBreaks, closeToAxis, coincidence, gradedShares, mostBreaks, nearAxis, steepestGraded } from './path.ts';
import type { TransferLayout } from './wasm-layout.ts';

const zero = int.constant(0);
const yes = int.constant(1);

/** Writes `findBreaks` of path.ts: fills the breaks of the ray at hand and their number, 0 where it misses. */
export function writeFindBreaks(module: ModuleWriter, layout: TransferLayout): Callee {
  const { sinI, cosI, minorSin, minorCos, major, height, radius, breaks, breakCount, from, to, least } = layout;
  const insert = writeInsert(module, layout);
  return module.define([], [], (w) => {
    breakCount.set(w, zero);
    enterVolume(w, layout);
    w.when(int.not(f.greaterThan(to.get(), from.get())), () => w.leave());
    least.set(w, f.multiply(f.subtract(to.get(), from.get()), f.constant(coincidence)));
    w.store(zero, breaks, from.get());
    w.store(zero, breaks + 8, to.get());
    breakCount.set(w, int.constant(2));
    const atHeight = (z: Float): void => {
      w.when(f.notEqual(cosI.get(), f.constant(0)), () => w.run(insert, f.divide(f.subtract(z, minorSin.get()), cosI.get())));
    };
    const atDepth = (y: Float): void => {
      w.when(f.notEqual(sinI.get(), f.constant(0)), () => w.run(insert, f.divide(f.subtract(minorCos.get(), y), sinI.get())));
    };
    atHeight(f.constant(0));
    const distance = w.let(f.abs(major.get()));
    w.when(f.less(distance, f.multiply(f.constant(closeToAxis), radius.get())), () => atDepth(f.constant(0)));
    forEachEdge(w, layout.zEdges, atHeight);
    forEachEdge(w, layout.rEdges, (r) => {
      const square = w.let(f.subtract(f.multiply(r, r), f.multiply(major.get(), major.get())));
      w.when(f.greaterThan(square, f.constant(0)), () => {
        const depth = w.let(f.sqrt(square));
        atDepth(depth);
        atDepth(f.negate(depth));
      });
    });
    w.when(f.less(distance, f.multiply(f.constant(nearAxis), radius.get())), () => {
      for (const times of axisBreaks) {
        atDepth(w.let(f.multiply(f.constant(times), distance)));
        atDepth(w.let(f.multiply(f.constant(-times), distance)));
      }
    });
    for (const share of gradedShares) {
      const level = w.let(f.multiply(f.constant(share), height.get()));
      atHeight(level);
      atHeight(f.negate(level));
    }
    w.when(f.less(f.abs(cosI.get()), f.constant(steepestGraded)), () => {
      for (const share of gradedShares) {
        const depth = w.let(f.multiply(f.constant(share), radius.get()));
        atDepth(depth);
        atDepth(f.negate(depth));
      }
    });
  });
}

function forEachEdge(w: FunctionWriter, { count, address }: TransferLayout['zEdges'], take: (edge: Float) => void): void {
  w.when(count.get(), () => {
    w.count(zero, count.get(), 1, (k) => take(w.let(f.load(int.add(address.get(), int.shiftLeft(k, int.constant(3)))))));
  });
}

/** Where the ray enters and leaves the volume: `from` ≥ `to` where it misses. */
function enterVolume(w: FunctionWriter, { sinI, cosI, minor, minorSin, minorCos, major, radius, height, from, to }: TransferLayout): void {
  const none = (): void => {
    from.set(w, f.constant(0));
    to.set(w, f.constant(0));
    w.leave();
  };
  const square = w.let(f.subtract(f.multiply(radius.get(), radius.get()), f.multiply(major.get(), major.get())));
  w.when(f.lessOrEqual(square, f.constant(0)), none);
  from.set(w, f.constant(-Infinity));
  to.set(w, f.constant(Infinity));
  w.when(
    f.equal(sinI.get(), f.constant(0)),
    () => w.when(f.greaterThan(f.multiply(minor.get(), minor.get()), square), none),
    () => {
      const half = w.let(f.divide(f.sqrt(square), f.abs(sinI.get())));
      const middle = w.let(f.divide(minorCos.get(), sinI.get()));
      from.set(w, f.subtract(middle, half));
      to.set(w, f.add(middle, half));
    },
  );
  w.when(
    f.equal(cosI.get(), f.constant(0)),
    () => w.when(f.greaterThan(f.abs(minorSin.get()), height.get()), none),
    () => {
      const half = w.let(f.divide(height.get(), f.abs(cosI.get())));
      const middle = w.let(f.divide(f.negate(minorSin.get()), cosI.get()));
      from.set(w, f.max(from.get(), f.subtract(middle, half)));
      to.set(w, f.min(to.get(), f.add(middle, half)));
    },
  );
}

/** Puts a number where it belongs among the breaks, unless it is out of range or there already. */
function writeInsert(module: ModuleWriter, { breaks, breakCount, least, from, to }: TransferLayout): Callee {
  return module.define(['f64'], [], (w) => {
    const s = w.parameter(0, 'f64');
    const isOutside = int.not(int.and(f.greaterThan(s, from.get()), f.less(s, to.get())));
    w.when(int.or(isOutside, int.greaterOrEqual(breakCount.get(), int.constant(mostBreaks))), () => w.leave());
    const address = (k: Int): Int => int.shiftLeft(k, int.constant(3));
    const at = w.variable('i32', int.subtract(breakCount.get(), yes));
    w.repeatWhile(() => f.greaterThan(f.load(address(int.subtract(at, yes)), breaks), s), () => at.set(int.subtract(at, yes)));
    const below = f.subtract(s, f.load(address(int.subtract(at, yes)), breaks));
    const above = f.subtract(f.load(address(at), breaks), s);
    w.when(int.or(f.lessOrEqual(below, least.get()), f.lessOrEqual(above, least.get())), () => w.leave());
    const end = w.variable('i32', breakCount.get());
    w.repeatWhile(() => int.greaterThan(end, at), () => {
      w.store(address(end), breaks, f.load(address(int.subtract(end, yes)), breaks));
      end.set(int.subtract(end, yes));
    });
    w.store(address(at), breaks, s);
    breakCount.set(w, int.add(breakCount.get(), yes));
  });
}
