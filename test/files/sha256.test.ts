import { createHash } from 'node:crypto';
import { expect, test } from 'vitest';
import { sha256Hex, sha256OfText } from '../../src/files/sha256.ts';

test('the examples of FIPS 180-2, appendix B', () => {
  expect(sha256OfText('abc')).toBe('ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad');
  expect(sha256OfText('abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq')).toBe(
    '248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1',
  );
  expect(sha256Hex(new Uint8Array(1e6).fill(0x61))).toBe('cdc76e5c9914fb9281a1c7e284d73e67f1809a48a497200e046d39ccc7112cd0');
});

test('every length around a block, and other scripts, as Node computes them', () => {
  for (let length = 0; length < 200; length++) {
    const bytes = Uint8Array.from({ length }, (_, i) => (i * 37 + length) % 256);
    expect(sha256Hex(bytes)).toBe(createHash('sha256').update(bytes).digest('hex'));
  }
  expect(sha256OfText('µ銀河🌌')).toBe(createHash('sha256').update('µ銀河🌌', 'utf8').digest('hex'));
});
