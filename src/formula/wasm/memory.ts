/** Grows a memory to hold at least so many bytes. */
export function ensureMemory(memory: WebAssembly.Memory, bytes: number): void {
  const missing = bytes - memory.buffer.byteLength;
  if (missing > 0) memory.grow(Math.ceil(missing / 65536));
}
