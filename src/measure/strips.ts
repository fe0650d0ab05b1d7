import { axisOffsetsKpc, pixelsPerBeam } from './disc.ts';
import type { DiscOrientation, MapFrame } from './disc.ts';
import { checkEdges, findBin } from './edges.ts';
import { measureRegions } from './region.ts';
import type { MeasuredMaps, RegionValues } from './region.ts';

/** Strips parallel to one of a galaxy's axes on the sky, each cut into boxes along it. */
export interface StripSpec {
  readonly parallelTo: 'major axis' | 'minor axis';
  /** Edges of the strips, offsets across that axis, kpc. */
  readonly stripEdgesKpc: readonly number[];
  /** Edges of the boxes, offsets along that axis, kpc. */
  readonly boxEdgesKpc: readonly number[];
}

/** One box of a strip: middle along and across the strip's axis, kpc. */
export interface Box extends RegionValues {
  readonly alongKpc: number;
  readonly acrossKpc: number;
}

/**
 * Measures strips on the sky without deprojection, for discs near edge-on: result[strip][box]. Strips
 * parallel to the minor axis are vertical profiles. Offsets along the major axis are positive on the
 * receding half, along the minor axis at position angle + 90 deg. Throws InputError for edges that
 * do not rise.
 */
export function measureStrips(
  maps: MeasuredMaps,
  frame: MapFrame,
  orientation: DiscOrientation,
  spec: StripSpec,
): Box[][] {
  const boxOf = stripBoxes(frame, orientation, spec);
  const [strips, boxes] = [spec.stripEdgesKpc.length - 1, spec.boxEdgesKpc.length - 1];
  const values = measureRegions(maps, boxOf, strips * boxes, pixelsPerBeam(frame));
  return Array.from({ length: strips }, (_, strip) =>
    Array.from({ length: boxes }, (_, box) => ({
      ...values[strip * boxes + box],
      alongKpc: middle(spec.boxEdgesKpc, box),
      acrossKpc: middle(spec.stripEdgesKpc, strip),
    })),
  );
}

/** The box of every pixel, strip * boxes + box, or -1. Throws InputError for edges that do not rise. */
export function stripBoxes(frame: MapFrame, orientation: DiscOrientation, spec: StripSpec): Int32Array {
  checkEdges(spec.stripEdgesKpc, 'strips');
  checkEdges(spec.boxEdgesKpc, 'boxes');
  const { alongMajor, alongMinor } = axisOffsetsKpc(frame, orientation);
  const [along, across] = spec.parallelTo === 'major axis' ? [alongMajor, alongMinor] : [alongMinor, alongMajor];
  const boxes = spec.boxEdgesKpc.length - 1;
  return Int32Array.from(along, (offset, k) => {
    const box = findBin(spec.boxEdgesKpc, offset);
    const strip = findBin(spec.stripEdgesKpc, across[k]);
    return box < 0 || strip < 0 ? -1 : strip * boxes + box;
  });
}

function middle(edges: readonly number[], bin: number): number {
  return (edges[bin] + edges[bin + 1]) / 2;
}
