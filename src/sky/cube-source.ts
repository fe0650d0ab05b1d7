import type { RowSource } from './depth-maps.ts';

/** A cube that gives rows of all its channels, or whole channels; in memory, or in a file too large for it. */
export interface CubeSource {
  /** Rows `from` to `to` (not included), [channel * pixels + pixel]. */
  rows(from: number, to: number): Float64Array;
  /** One channel, [row * nx + column]. */
  plane(channel: number): Float64Array;
}

/** A cube in memory, [channel * ny * nx + row * nx + column]. */
export function cubeInMemory(values: Float64Array, nx: number, ny: number): CubeSource {
  const channels = values.length / (nx * ny);
  return {
    rows: (from, to) => {
      const pixels = (to - from) * nx;
      const rows = new Float64Array(channels * pixels);
      for (let channel = 0; channel < channels; channel++) {
        const start = (channel * ny + from) * nx;
        rows.set(values.subarray(start, start + pixels), channel * pixels);
      }
      return rows;
    },
    plane: (channel) => values.subarray(channel * nx * ny, (channel + 1) * nx * ny),
  };
}

/** The Q and U of several bands as those of one, channel after channel. */
export function joinedRows(bands: readonly { readonly Q: CubeSource; readonly U: CubeSource }[], nx: number, ny: number): RowSource {
  const join = (parts: readonly Float64Array[]): Float64Array => {
    if (parts.length === 1) return parts[0];
    const all = new Float64Array(parts.reduce((sum, part) => sum + part.length, 0));
    let at = 0;
    for (const part of parts) {
      all.set(part, at);
      at += part.length;
    }
    return all;
  };
  return { nx, ny, rows: (from, to) => ({ Q: join(bands.map(({ Q }) => Q.rows(from, to))), U: join(bands.map(({ U }) => U.rows(from, to))) }) };
}
