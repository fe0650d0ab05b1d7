import { hasWasmSimd } from '../formula/wasm/available.ts';
import { int, vector as v } from '../formula/wasm/code.ts';
import { ensureMemory } from '../formula/wasm/memory.ts';
import { ModuleWriter } from '../formula/wasm/module.ts';

/** Pixels that are mixed in one call: their planes stay in the processor's cache meanwhile. */
export const blockPixels = 128;
/** Channels that are made side by side, so that each number is read once for all of them. */
export const groupChannels = 4;
const planeBytes = 8 * blockPixels;
const pixelsAtOnce = 4;

/** Sums of planes over a block of pixels, many at once. */
export interface Mixer {
  /** [term][blockPixels], to be filled before a call; anew after `prepare`. */
  readonly planes: () => Float64Array;
  /** [channel][blockPixels], what a call has made. */
  readonly channels: () => Float64Array;
  /** Takes weights, [group][term][groupChannels]. */
  prepare(weights: Float64Array, terms: number): void;
  /** Makes all channels of the weights, from the first `terms` planes of them. */
  mix(terms: number): void;
}

/** The mixer of this host: WebAssembly SIMD code where it has that, else JavaScript; the same sums to the last bit. */
export function makeMixer(canUseWasm = hasWasmSimd()): Mixer {
  let [allTerms, groups] = [0, 0];
  let [planesAt, channelsAt] = [0, 0];
  const memory = canUseWasm ? startModule() : undefined;
  let buffer: ArrayBuffer = memory ? memory.memory.buffer : new ArrayBuffer(0);
  const view = (at: number, length: number): Float64Array => new Float64Array(buffer, at, length);
  return {
    planes: () => view(planesAt, allTerms * blockPixels),
    channels: () => view(channelsAt, groups * groupChannels * blockPixels),
    prepare: (weights, terms) => {
      allTerms = terms;
      groups = weights.length / terms / groupChannels;
      planesAt = 16 * Math.ceil((8 * weights.length) / 16);
      channelsAt = planesAt + terms * planeBytes;
      const bytes = channelsAt + groups * groupChannels * planeBytes;
      if (memory) {
        ensureMemory(memory.memory, bytes);
        buffer = memory.memory.buffer;
      } else if (buffer.byteLength < bytes) buffer = new ArrayBuffer(bytes);
      view(0, weights.length).set(weights);
    },
    mix: (terms) => {
      for (let group = 0; group < groups; group++) {
        const [weightsAt, into] = [8 * groupChannels * allTerms * group, channelsAt + groupChannels * planeBytes * group];
        if (memory) memory.mixGroup(weightsAt, planesAt, into, terms);
        else mixGroup(view(weightsAt, groupChannels * terms), view(planesAt, terms * blockPixels), view(into, groupChannels * blockPixels), terms);
      }
    },
  };
}

/** One group of channels in JavaScript. */
function mixGroup(weights: Float64Array, planes: Float64Array, into: Float64Array, terms: number): void {
  for (let pixel = 0; pixel < blockPixels; pixel++) {
    let [a, b, c, d] = [0, 0, 0, 0];
    for (let term = 0; term < terms; term++) {
      const value = planes[term * blockPixels + pixel];
      a += value * weights[4 * term];
      b += value * weights[4 * term + 1];
      c += value * weights[4 * term + 2];
      d += value * weights[4 * term + 3];
    }
    [a, b, c, d].forEach((sum, channel) => (into[channel * blockPixels + pixel] = sum));
  }
}

interface MixModule {
  readonly memory: WebAssembly.Memory;
  /** (weights, planes, into, terms), addresses: the same in WebAssembly. */
  mixGroup(weights: number, planes: number, into: number, terms: number): void;
}

function startModule(): MixModule {
  const module = new ModuleWriter();
  module.define(
    ['i32', 'i32', 'i32', 'i32'],
    [],
    (w) => {
      const [weights, planes, into, terms] = [0, 1, 2, 3].map((k) => w.parameter(k, 'i32'));
      const zero = w.constant(0);
      const vectors = Array.from({ length: pixelsAtOnce / 2 }, (_, k) => 16 * k);
      const sums = Array.from({ length: groupChannels }, () => vectors.map(() => w.variable('v128')));
      const [weight, plane] = [w.variable('i32'), w.variable('i32')];
      w.count(int.constant(0), int.constant(planeBytes), 8 * pixelsAtOnce, (offset) => {
        sums.flat().forEach((sum) => sum.set(zero));
        weight.set(weights);
        plane.set(int.add(planes, offset));
        w.count(int.constant(0), terms, 1, () => {
          const values = vectors.map((at) => w.let(v.load(plane, at)));
          sums.forEach((row, channel) => {
            const factor = w.let(v.loadSplat(weight, 8 * channel));
            row.forEach((sum, k) => sum.set(v.add(sum, v.multiply(values[k], factor))));
          });
          weight.set(int.add(weight, int.constant(8 * groupChannels)));
          plane.set(int.add(plane, int.constant(planeBytes)));
        });
        const place = w.let(int.add(into, offset));
        sums.forEach((row, channel) => row.forEach((sum, k) => w.store(place, channel * planeBytes + vectors[k], sum)));
      });
    },
    'mixGroup',
  );
  const { memory, mixGroup } = new WebAssembly.Instance(new WebAssembly.Module(module.encode())).exports as unknown as MixModule;
  return { memory, mixGroup };
}
