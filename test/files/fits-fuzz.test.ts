import { gzipSync } from 'node:zlib';
import { expect, test } from 'vitest';
import { readFits } from '../../src/files/fits-read.ts';
import { findProvenance } from '../../src/files/fits-scene.ts';
import { skyImageFromFits } from '../../src/files/sky-fits-read.ts';
import { stokesFits } from '../../src/files/sky-fits-write.ts';
import { randomStream } from '../../src/math/random.ts';
import { InputError } from '../../src/units/input-error.ts';
import { PROVENANCE, UNEVEN_CUBE } from './samples.ts';

const GOOD = stokesFits(UNEVEN_CUBE, 'Q', PROVENANCE, 32);
const PACKED = new Uint8Array(gzipSync(GOOD));

/** Read everything; how it ended. Anything thrown but InputError is thrown on. */
function outcome(bytes: Uint8Array): 'read' | 'refused' {
  try {
    const hdus = readFits(bytes, 'f');
    skyImageFromFits(hdus, 'f');
    findProvenance(hdus, 'f');
    return 'read';
  } catch (error) {
    if (error instanceof InputError && error.message.startsWith('f: ')) return 'refused';
    throw error;
  }
}

/** One byte of a header or of the data replaced, biased to what headers hold. */
function damaged(bytes: Uint8Array, index: number): Uint8Array {
  const stream = randomStream(20, 'files/fuzz', index);
  const bad = bytes.slice();
  const edits = 1 + Math.floor(stream.uniform() * 3);
  for (let k = 0; k < edits; k++) {
    const at = Math.floor(stream.uniform() * bad.length);
    const kinds = [() => bad[at] ^ (1 << Math.floor(stream.uniform() * 8)), () => 48 + Math.floor(stream.uniform() * 10), () => 32 + Math.floor(stream.uniform() * 95)];
    bad[at] = kinds[Math.floor(stream.uniform() * kinds.length)]();
  }
  return bad;
}

test('the undamaged files are read', () => {
  expect([outcome(GOOD), outcome(PACKED)]).toEqual(['read', 'read']);
});

test('damaged bytes: read or refused with an InputError that names the file, nothing else', () => {
  const outcomes = Array.from({ length: 600 }, (_, i) => outcome(damaged(GOOD, i)));
  expect(outcomes).toContain('read');
  expect(outcomes.filter((end) => end === 'refused').length).toBeGreaterThan(50);
});

test('each card of each header spoilt in turn', () => {
  const ends = new Set<string>();
  for (let at = 0; at < GOOD.length; at += 80) {
    const line = String.fromCharCode(...GOOD.subarray(at, at + 80));
    if (!/^[A-Z0-9_-]+ *= /.test(line)) continue;
    for (const value of ["'", '-7', '1E300', 'T', "'x&'", '']) {
      const bad = GOOD.slice();
      bad.set(new TextEncoder().encode(value.padEnd(70)), at + 10);
      ends.add(outcome(bad));
    }
  }
  expect([...ends].sort()).toEqual(['read', 'refused']);
});

test('cuts: every one before the last data is refused', () => {
  const lastData = GOOD.length - 2880;
  for (let i = 0; i < 300; i++) {
    const length = Math.floor((i / 300) * lastData);
    // A cut exactly between two units leaves a shorter file that is whole, but it has no scene's table.
    const end = outcome(GOOD.subarray(0, length));
    if (end === 'read') expect(findProvenance(readFits(GOOD.subarray(0, length), 'f'), 'f')).toBeUndefined();
  }
});

test('damaged and cut gzip files are refused or, where the flip is in a name or time, read', () => {
  for (let i = 0; i < 150; i++) {
    const bad = damaged(PACKED, 1000 + i);
    outcome(bad);
    expect(outcome(PACKED.subarray(0, Math.floor((i / 150) * PACKED.length)))).toBe('refused');
  }
});
