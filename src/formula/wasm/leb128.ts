/** A whole number from 0 to 2^31 - 1 in LEB128, unsigned. */
export function unsigned(value: number): number[] {
  const bytes: number[] = [];
  let rest = value;
  while (rest >= 128) {
    bytes.push((rest & 127) | 128);
    rest >>>= 7;
  }
  bytes.push(rest);
  return bytes;
}

/** A whole number of 32 bits in LEB128, signed. */
export function signed(value: number): number[] {
  const bytes: number[] = [];
  let rest = value | 0;
  while (rest < -64 || rest > 63) {
    bytes.push((rest & 127) | 128);
    rest >>= 7;
  }
  bytes.push(rest & 127);
  return bytes;
}

/** A whole number of 64 bits in LEB128, signed. */
export function signedLong(value: bigint): number[] {
  const bytes: number[] = [];
  let rest = value;
  while (rest < -64n || rest > 63n) {
    bytes.push(Number(rest & 127n) | 128);
    rest >>= 7n;
  }
  bytes.push(Number(rest & 127n));
  return bytes;
}
