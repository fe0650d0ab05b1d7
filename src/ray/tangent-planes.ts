import type { RayTangents } from './types.ts';

const names = ['I', 'Q', 'U', 'faradayDepth'] as const;

/** Arrays for the derivatives of so many rays, empty or in memory that threads share. */
export function makeRayTangents(parameters: number, frequencies: number, rays: number, shared = false): RayTangents {
  const array = (planes: number): Float64Array =>
    shared ? new Float64Array(new SharedArrayBuffer(8 * planes * rays)) : new Float64Array(planes * rays);
  return { I: array(parameters * frequencies), Q: array(parameters * frequencies), U: array(parameters * frequencies), faradayDepth: array(parameters) };
}

/** Copies the derivatives of `count` rays to their place, from `from` on, among `rays`. */
export function placeTangents(whole: RayTangents, tile: RayTangents, rays: number, from: number, count: number): void {
  for (const name of names) {
    const planes = tile[name].length / count;
    for (let plane = 0; plane < planes; plane++) whole[name].set(tile[name].subarray(plane * count, (plane + 1) * count), plane * rays + from);
  }
}

/** The derivatives of the first `count` of `rays` rays. */
export function firstTangents(whole: RayTangents, rays: number, count: number): RayTangents {
  const cut = (planes: Float64Array): Float64Array => planes.filter((_, k) => k % rays < count);
  return { I: cut(whole.I), Q: cut(whole.Q), U: cut(whole.U), faradayDepth: cut(whole.faradayDepth) };
}

/** Joins the derivatives of tiles, given in order with their numbers of rays; undefined where there are none. */
export function joinTangents(tiles: readonly { readonly tangents?: RayTangents; readonly faradayDepth: Float64Array }[]): RayTangents | undefined {
  const first = tiles.find((tile) => tile.tangents && tile.faradayDepth.length > 0);
  if (!first?.tangents) return undefined;
  const count = first.faradayDepth.length;
  const [parameters, planes] = [first.tangents.faradayDepth.length / count, first.tangents.I.length / count];
  const rays = tiles.reduce((sum, { faradayDepth }) => sum + faradayDepth.length, 0);
  const whole = makeRayTangents(parameters, planes / parameters, rays);
  let from = 0;
  for (const { tangents, faradayDepth } of tiles) {
    if (tangents && faradayDepth.length > 0) placeTangents(whole, tangents, rays, from, faradayDepth.length);
    from += faradayDepth.length;
  }
  return whole;
}
