/** A number in LEB128, unsigned. */
export function unsigned(value: number): number[] {
  const bytes: number[] = [];
  let rest = value;
  do {
    const low = rest % 128;
    rest = Math.floor(rest / 128);
    bytes.push(rest > 0 ? low + 128 : low);
  } while (rest > 0);
  return bytes;
}

/** A number in LEB128, signed. */
export function signed(value: bigint): number[] {
  const bytes: number[] = [];
  let rest = value;
  for (;;) {
    const low = Number(rest & 127n);
    rest >>= 7n;
    if ((rest === 0n && low < 64) || (rest === -1n && low >= 64)) return [...bytes, low];
    bytes.push(low + 128);
  }
}
