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

/** Pixels whose planes stay in the processor's cache while all channels are made of them. */
const blockPixels = 512;

/** Channels `from` to `to` (not included) of pixels `first` to `last`, [(channel - from) * (last - first) + pixel - first]. */
export function channelPlanes({ planes, matrix }: BasisPlanes, pixels: number, from: number, to: number, first = 0, last = pixels): Float64Array {
  const count = last - first;
  const out = new Float64Array((to - from) * count);
  if (!matrix) {
    for (let channel = from; channel < to; channel++) out.set(planes.subarray(channel * pixels + first, channel * pixels + last), (channel - from) * count);
    return out;
  }
  const terms = planes.length / pixels;
  for (let start = 0; start < count; start += blockPixels) {
    const end = Math.min(count, start + blockPixels);
    let channel = from;
    for (; channel + 4 <= to; channel += 4) mixFour(planes, pixels, first, matrix, terms, channel, out, count, (channel - from) * count, start, end);
    for (; channel < to; channel++) mixOne(planes, pixels, first, matrix, terms, channel, out, (channel - from) * count, start, end);
  }
  return out;
}

/** Four channels at once: each number is read once for all of them. */
function mixFour(
  planes: Float64Array, pixels: number, first: number, matrix: Float64Array, terms: number, channel: number,
  out: Float64Array, count: number, at: number, start: number, end: number,
): void {
  const [rowA, rowB, rowC, rowD] = [channel * terms, (channel + 1) * terms, (channel + 2) * terms, (channel + 3) * terms];
  for (let pixel = start; pixel < end; pixel++) {
    let [a, b, c, d] = [0, 0, 0, 0];
    for (let term = 0, place = first + pixel; term < terms; term++, place += pixels) {
      const value = planes[place];
      a += matrix[rowA + term] * value;
      b += matrix[rowB + term] * value;
      c += matrix[rowC + term] * value;
      d += matrix[rowD + term] * value;
    }
    out[at + pixel] = a;
    out[at + count + pixel] = b;
    out[at + 2 * count + pixel] = c;
    out[at + 3 * count + pixel] = d;
  }
}

function mixOne(
  planes: Float64Array, pixels: number, first: number, matrix: Float64Array, terms: number, channel: number,
  out: Float64Array, at: number, start: number, end: number,
): void {
  for (let pixel = start; pixel < end; pixel++) {
    let sum = 0;
    for (let term = 0, place = first + pixel; term < terms; term++, place += pixels) sum += matrix[channel * terms + term] * planes[place];
    out[at + pixel] = sum;
  }
}
