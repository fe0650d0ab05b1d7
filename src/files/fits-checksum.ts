/**
 * The 32-bit ones'-complement sum of bytes, whose count must be a multiple of 4, continued from
 * `before` (FITS 4.0, appendix J).
 */
export function onesComplementSum(bytes: Uint8Array, before = 0): number {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  let sum = before;
  for (let offset = 0; offset < bytes.length; offset += 4) {
    sum += view.getUint32(offset);
    if (sum >= 2 ** 32) sum -= 2 ** 32 - 1;
  }
  return sum;
}

/**
 * The 16 letters and digits of a CHECKSUM card (FITS 4.0, appendix J): written in place of the
 * sixteen zeros that were summed, they make the sum of the whole unit -0.
 */
export function checksumText(sumOfUnit: number): string {
  const complement = ~sumOfUnit >>> 0;
  const text = new Array<number>(16);
  for (let byteIndex = 0; byteIndex < 4; byteIndex++) {
    const byte = (complement >>> (24 - 8 * byteIndex)) & 0xff;
    const quarter = Math.floor(byte / 4) + 0x30;
    const four = [quarter + (byte % 4), quarter, quarter, quarter];
    while (four.some(isPunctuation)) {
      for (const j of [0, 2]) {
        if (!isPunctuation(four[j]) && !isPunctuation(four[j + 1])) continue;
        four[j]++;
        four[j + 1]--;
      }
    }
    // One place to the right: the value begins in column 12, which is not a multiple of 4.
    for (let j = 0; j < 4; j++) text[(4 * j + byteIndex + 1) % 16] = four[j];
  }
  return String.fromCharCode(...text);
}

function isPunctuation(code: number): boolean {
  return (code >= 0x3a && code <= 0x40) || (code >= 0x5b && code <= 0x60);
}
