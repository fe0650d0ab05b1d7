/** Whether this host lets threads share memory. */
export function canShareMemory(): boolean {
  const { crossOriginIsolated } = globalThis as { readonly crossOriginIsolated?: boolean };
  return typeof SharedArrayBuffer !== 'undefined' && crossOriginIsolated !== false;
}

/** An array of zeros for numbers that many threads read: in shared memory where the host has it, so that it is not copied. */
export function gridArray(bits: 32 | 64, length: number): Float32Array | Float64Array {
  const bytes = (bits / 8) * length;
  const buffer = canShareMemory() ? new SharedArrayBuffer(bytes) : new ArrayBuffer(bytes);
  return bits === 32 ? new Float32Array(buffer) : new Float64Array(buffer);
}
