import type { DiscOrientation, MapFrame } from './disc.ts';
import { axisOffsetsKpc } from './disc.ts';
import { measurableAsDisc, ringSectors, type RingSpec } from './rings.ts';
import { stripBoxes, type StripSpec } from './strips.ts';

/** One region of a layout: a sector of a ring, or a box of a strip. */
export interface LayoutRegion {
  /** Which ring or strip, from 0. */
  readonly group: number;
  /** Ring: inner and outer radius; strip: its middle across, twice. kpc. */
  readonly innerKpc: number;
  readonly outerKpc: number;
  /** Galaxy azimuth of a sector's middle, rad; NaN for a box. */
  readonly azimuth: number;
  /** Offset of a box along its strip, kpc; NaN for a sector. */
  readonly alongKpc: number;
}

/** How a map is cut into regions. */
export interface Layout {
  readonly kind: 'rings' | 'strips';
  readonly regions: readonly LayoutRegion[];
  /** Region of every pixel, or -1. */
  readonly regionOf: Int32Array;
  readonly groups: number;
}

/** Rings and sectors, or, for a disc too near edge-on, strips parallel to the minor axis (vertical profiles). */
export function makeLayout(frame: MapFrame, orientation: DiscOrientation, spec: RingSpec): Layout {
  return measurableAsDisc(orientation.inclination) ? ringLayout(frame, orientation, spec) : stripLayout(frame, orientation, spec);
}

function ringLayout(frame: MapFrame, orientation: DiscOrientation, spec: RingSpec): Layout {
  const { edgesKpc, sectors, firstAzimuth = 0 } = spec;
  const groups = edgesKpc.length - 1;
  const regions = Array.from({ length: groups * sectors }, (_, k): LayoutRegion => {
    const group = Math.floor(k / sectors);
    return {
      group,
      innerKpc: edgesKpc[group],
      outerKpc: edgesKpc[group + 1],
      azimuth: firstAzimuth + ((k % sectors) * 2 * Math.PI) / sectors,
      alongKpc: NaN,
    };
  });
  return { kind: 'rings', regions, regionOf: ringSectors(frame, orientation, spec), groups };
}

/** Strips between the radii on both halves of the major axis, boxes as wide as the first strip out to the last radius. */
function stripLayout(frame: MapFrame, orientation: DiscOrientation, { edgesKpc }: RingSpec): Layout {
  const outer = edgesKpc[edgesKpc.length - 1];
  const inside = edgesKpc.filter((edge) => edge > 0);
  const stripEdgesKpc = [...inside.map((edge) => -edge).reverse(), ...(edgesKpc[0] === 0 ? [0] : []), ...inside];
  const { alongMinor } = axisOffsetsKpc(frame, orientation);
  const reach = Math.min(outer, alongMinor.reduce((most, offset) => (Math.abs(offset) > most ? Math.abs(offset) : most), 0));
  const half = 8;
  const spec: StripSpec = {
    parallelTo: 'minor axis',
    stripEdgesKpc,
    boxEdgesKpc: Array.from({ length: 2 * half + 2 }, (_, k) => (reach * (k - half - 0.5)) / (half + 0.5)),
  };
  const boxes = spec.boxEdgesKpc.length - 1;
  const groups = stripEdgesKpc.length - 1;
  const middle = (edges: readonly number[], k: number): number => (edges[k] + edges[k + 1]) / 2;
  const regions = Array.from({ length: groups * boxes }, (_, k): LayoutRegion => {
    const group = Math.floor(k / boxes);
    return { group, innerKpc: stripEdgesKpc[group], outerKpc: stripEdgesKpc[group + 1], azimuth: NaN, alongKpc: middle(spec.boxEdgesKpc, k % boxes) };
  });
  return { kind: 'strips', regions, regionOf: stripBoxes(frame, orientation, spec), groups };
}
