import { blockPixels, groupChannels, makeMixer, type Mixer } from './wasm-mix.ts';

/**
 * What rays bring to one band, in planes [term * pixels + pixel] of which every channel is a sum:
 * channel = sum over terms of matrix[channel * terms + term] * plane. Without a matrix the planes
 * are the channels. Beam, crop and high-pass act on the planes, few as they are, as on channels.
 */
export interface ChannelBasis {
  readonly I: BasisPlanes;
  readonly Q: BasisPlanes;
  readonly U: BasisPlanes;
}

export interface BasisPlanes {
  readonly planes: Float64Array;
  readonly matrix?: Float64Array;
}

/**
 * Makes a function that gives channels `from` to `to` (not included) of pixels `first` to `last`,
 * [(channel - from) * (last - first) + pixel - first]. `negligible` is the share of a pixel's
 * largest term that what is left out of it may add up to: terms of high degree count in few places.
 */
export function channelMaker({ planes, matrix }: BasisPlanes, pixels: number, negligible = 0): (from: number, to: number, first?: number, last?: number) => Float64Array {
  if (!matrix) return (from, to, first = 0, last = pixels) => cutPlanes(planes, pixels, from, to, first, last);
  const terms = planes.length / pixels;
  const used = termsUsed(planes, pixels, terms, negligible);
  const mixer = (sharedMixer ??= makeMixer());
  return (from, to, first = 0, last = pixels) => {
    const count = last - first;
    const out = new Float64Array((to - from) * count);
    mixer.prepare(packWeights(matrix, terms, from, to), terms);
    const [into, made] = [mixer.planes(), mixer.channels()];
    // Blocks keep their places among all pixels, so that a part of a plane is the same as in the whole.
    for (let block = Math.floor(first / blockPixels); block * blockPixels < last; block++) {
      const [start, end] = [Math.max(first, block * blockPixels), Math.min(last, (block + 1) * blockPixels)];
      for (let term = 0; term < used[block]; term++) into.set(planes.subarray(term * pixels + start, term * pixels + end), term * blockPixels);
      mixer.mix(used[block]);
      for (let k = 0; k < to - from; k++) out.set(made.subarray(k * blockPixels, k * blockPixels + end - start), k * count + start - first);
    }
    return out;
  };
}

let sharedMixer: Mixer | undefined;

function cutPlanes(planes: Float64Array, pixels: number, from: number, to: number, first: number, last: number): Float64Array {
  const out = new Float64Array((to - from) * (last - first));
  for (let channel = from; channel < to; channel++) out.set(planes.subarray(channel * pixels + first, channel * pixels + last), (channel - from) * (last - first));
  return out;
}

/** Rows of a matrix side by side in groups, [group][term][channel of the group], filled up with zeros. */
function packWeights(matrix: Float64Array, terms: number, from: number, to: number): Float64Array {
  const groups = Math.ceil((to - from) / groupChannels);
  const packed = new Float64Array(groups * terms * groupChannels);
  for (let channel = from; channel < to; channel++) {
    const [group, place] = [Math.floor((channel - from) / groupChannels), (channel - from) % groupChannels];
    for (let term = 0; term < terms; term++) packed[(group * terms + term) * groupChannels + place] = matrix[channel * terms + term];
  }
  return packed;
}

/** For each block of pixels, how many terms count in any of them; at least one. */
function termsUsed(planes: Float64Array, pixels: number, terms: number, negligible: number): Int32Array {
  const used = new Int32Array(Math.ceil(pixels / blockPixels)).fill(1);
  const [largest, left] = [new Float64Array(blockPixels), new Float64Array(blockPixels)];
  used.forEach((_, block) => {
    const start = block * blockPixels;
    const count = Math.min(blockPixels, pixels - start);
    largest.fill(0);
    left.fill(0);
    for (let term = 0; term < terms; term++) {
      for (let k = 0, at = term * pixels + start; k < count; k++, at++) largest[k] = Math.max(largest[k], Math.abs(planes[at]));
    }
    for (let term = terms - 1; term > 0 && used[block] === 1; term--) {
      for (let k = 0, at = term * pixels + start; k < count; k++, at++) {
        left[k] += Math.abs(planes[at]);
        if (left[k] > negligible * largest[k]) used[block] = term + 1;
      }
    }
  });
  return used;
}
