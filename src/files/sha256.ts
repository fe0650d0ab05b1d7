const ROUND_CONSTANTS = rootFractions(64, (prime) => Math.cbrt(prime));
const INITIAL_STATE = rootFractions(8, (prime) => Math.sqrt(prime));

/** SHA-256 of bytes as 64 lower-case hexadecimal digits (FIPS 180-4, section 6.2). */
export function sha256Hex(bytes: Uint8Array): string {
  const state = Uint32Array.from(INITIAL_STATE);
  const schedule = new Uint32Array(64);
  const padded = pad(bytes);
  const view = new DataView(padded.buffer);
  for (let offset = 0; offset < padded.length; offset += 64) addBlock(state, schedule, view, offset);
  return Array.from(state, (word) => word.toString(16).padStart(8, '0')).join('');
}

/** SHA-256 of the UTF-8 encoding of a text. */
export function sha256OfText(text: string): string {
  return sha256Hex(new TextEncoder().encode(text));
}

/** The message, a one bit, zeros, and its length in bits as 64 bits: a multiple of 64 bytes. */
function pad(bytes: Uint8Array): Uint8Array {
  const padded = new Uint8Array(Math.ceil((bytes.length + 9) / 64) * 64);
  padded.set(bytes);
  padded[bytes.length] = 0x80;
  const view = new DataView(padded.buffer);
  view.setUint32(padded.length - 8, Math.floor(bytes.length / 2 ** 29));
  view.setUint32(padded.length - 4, (bytes.length << 3) >>> 0);
  return padded;
}

function addBlock(state: Uint32Array, w: Uint32Array, view: DataView, offset: number): void {
  for (let t = 0; t < 16; t++) w[t] = view.getUint32(offset + 4 * t);
  for (let t = 16; t < 64; t++) {
    const s0 = turn(w[t - 15], 7) ^ turn(w[t - 15], 18) ^ (w[t - 15] >>> 3);
    const s1 = turn(w[t - 2], 17) ^ turn(w[t - 2], 19) ^ (w[t - 2] >>> 10);
    w[t] = w[t - 16] + s0 + w[t - 7] + s1;
  }
  let [a, b, c, d, e, f, g, h] = state;
  for (let t = 0; t < 64; t++) {
    const sum1 = turn(e, 6) ^ turn(e, 11) ^ turn(e, 25);
    const choice = (e & f) ^ (~e & g);
    const t1 = (h + sum1 + choice + ROUND_CONSTANTS[t] + w[t]) | 0;
    const sum0 = turn(a, 2) ^ turn(a, 13) ^ turn(a, 22);
    const majority = (a & b) ^ (a & c) ^ (b & c);
    h = g;
    g = f;
    f = e;
    e = (d + t1) | 0;
    d = c;
    c = b;
    b = a;
    a = (t1 + sum0 + majority) | 0;
  }
  [a, b, c, d, e, f, g, h].forEach((value, i) => (state[i] += value));
}

function turn(word: number, bits: number): number {
  return (word >>> bits) | (word << (32 - bits));
}

/** First 32 bits of the fractional parts of a root of the first primes. */
function rootFractions(count: number, root: (prime: number) => number): Uint32Array {
  const words: number[] = [];
  for (let n = 2; words.length < count; n++) {
    let isPrime = true;
    for (let k = 2; k * k <= n; k++) if (n % k === 0) isPrime = false;
    // 53 bits hold the up to 3 bits before the point and all 32 after it.
    if (isPrime) words.push(Math.floor((root(n) % 1) * 2 ** 32));
  }
  return Uint32Array.from(words);
}
