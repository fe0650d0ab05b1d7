import { appendFileSync, readFileSync, truncateSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { journalLine, openJournal, scanJournal } from '../../src/files/journal.ts';
import { RowStore } from '../../src/files/row-store.ts';
import { inFolder } from '../support/tools.ts';

const write = (folder: string, rows: readonly (readonly [number, readonly number[]])[], name = 'w'): string => {
  const journal = openJournal(folder, name);
  for (const [row, values] of rows) journal.append(row, values);
  journal.close();
  return journal.path;
};

describe('journals', () => {
  it('give back every number as it was, blanks and infinities too', () => {
    fc.assert(
      fc.property(fc.array(fc.double(), { minLength: 1, maxLength: 8 }), (values) =>
        inFolder((folder) => {
          write(folder, [[0, values]]);
          const store = new RowStore(folder, 1);
          const read = store.values(0);
          store.close();
          expect([...read].every((value, k) => Object.is(value, values[k]))).toBe(true);
          expect(read.length).toBe(values.length);
        }),
      ),
      { numRuns: 60, seed: 1 },
    );
  });

  it('drop a torn last line wherever it was torn, and nothing else', () => {
    inFolder((folder) => {
      const path = write(folder, [[0, [1.5, NaN]], [1, [2.5, 3]], [2, [-0.125, 4e300]]]);
      const whole = readFileSync(path);
      const last = journalLine(2, [-0.125, 4e300]).length;
      for (let cut = 1; cut <= last; cut++) {
        writeFileSync(path, whole);
        truncateSync(path, whole.length - cut);
        const store = new RowStore(folder, 3);
        expect([store.has(0), store.has(1), store.has(2)]).toEqual([true, true, false]);
        expect(store.dropped).toBe(cut === last ? 0 : 1);
        expect([...store.values(1)]).toEqual([2.5, 3]);
        store.close();
      }
    });
  });

  it('take a changed byte for a line that was never written', () => {
    inFolder((folder) => {
      const path = write(folder, [[0, [1.25]], [1, [2.5]]]);
      writeFileSync(path, readFileSync(path, 'latin1').replace('1.25', '1.26'), 'latin1');
      expect(new RowStore(folder, 2).present).toBe(1);
      // What a power cut leaves of a file's end.
      appendFileSync(path, new Uint8Array(100));
      expect(new RowStore(folder, 2).dropped).toBe(2);
    });
  });

  it('merge in the order of rows, twins counted once, contradictions refused', () => {
    inFolder((folder) => {
      write(folder, [[5, [5]], [1, [1]], [3, [3]]], 'a');
      write(folder, [[0, [0]], [4, [4]], [1, [1]]], 'b');
      write(folder, [[2, [2]]], 'a');
      const store = new RowStore(folder, 6);
      expect(store.present).toBe(6);
      expect([0, 1, 2, 3, 4, 5].map((row) => store.values(row)[0])).toEqual([0, 1, 2, 3, 4, 5]);
      store.close();
      write(folder, [[3, [3.5]]], 'c');
      expect(() => new RowStore(folder, 6)).toThrow(/row 3 stands in .* with different values/);
      expect(() => new RowStore(folder, 4)).toThrow(/row 5 of a sweep of 4 rows/);
    });
  });

  it('are read in pieces: lines across the boundary of a piece are whole', () => {
    inFolder((folder) => {
      const rows = Array.from({ length: 30_000 }, (_, k) => [k, [Math.sqrt(k), -k / 7, 1 / (k + 1)]] as const);
      writeFileSync(join(folder, 'x-1.journal'), rows.map(([row, values]) => journalLine(row, values)).join(''));
      let next = 0;
      // 30000 lines of about 60 bytes: two pieces of a MiB.
      expect(scanJournal(join(folder, 'x-1.journal'), ({ row }) => expect(row).toBe(next++)).dropped).toBe(0);
      expect(next).toBe(30_000);
      const store = new RowStore(folder, 30_000);
      expect(store.values(29_999)[0]).toBe(Math.sqrt(29_999));
      store.close();
    });
  });
});
