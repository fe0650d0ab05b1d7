import { vector as v } from './code.ts';
import { ModuleWriter } from './module.ts';

let available: boolean | undefined;

/** Whether this host runs WebAssembly with 128-bit vectors. */
export function hasWasmSimd(): boolean {
  available ??= typeof WebAssembly === 'object' && WebAssembly.validate(probe());
  return available;
}

function probe(): Uint8Array<ArrayBuffer> {
  const module = new ModuleWriter();
  module.define([], ['v128'], (w) => w.leave(v.sqrt(w.constant(1))));
  return module.encode();
}
