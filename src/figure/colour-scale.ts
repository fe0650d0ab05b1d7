import { shownUnit } from './number-text.ts';
import type { ColourKind } from './palette.ts';
import type { PanelMap } from './panel-map.ts';

/** How values become colours; one scale serves every map of a row. */
export interface ColourScale {
  readonly kind: ColourKind;
  /** Values at the ends of the colours, in the maps' unit. */
  readonly limits: readonly [number, number];
  /** Values lie outside the limits, below or above, by more than a fiftieth of the range; they take the colour of the end. */
  readonly beyond: readonly [boolean, boolean];
  /** From the maps' unit to the shown one. */
  readonly factor: number;
  readonly shownUnit: string;
}

/** A largest value so many times the 99.5 % point is not let set the scale (own choice). */
const WILD = 1.5;

/**
 * The scale shared by maps of one kind and unit. Intensities run from 0 (or the lowest value, where all
 * are above half the largest) to the largest; signed quantities symmetrically to the largest |value|, or
 * to its 99.5 % point where a few noisy pixels far above would wash out the rest; angles over half a turn.
 * `limits` overrides. Throws RangeError where the maps differ in unit or kind, or there is none.
 */
export function sharedColourScale(maps: readonly PanelMap[], limits?: readonly [number, number]): ColourScale {
  const [first] = maps;
  if (!first) throw new RangeError('a colour scale needs at least one map');
  for (const map of maps) {
    if (map.unit !== first.unit || map.kind !== first.kind) {
      throw new RangeError(`maps "${first.title}" (${first.kind}, ${first.unit}) and "${map.title}" (${map.kind}, ${map.unit}) cannot share a colour scale`);
    }
  }
  const values = maps.flatMap((map) => Array.from(map.values).filter(Number.isFinite)).sort((a, b) => a - b);
  const chosen = limits ?? automaticLimits(first, values);
  const { factor, unit } = shownUnit(Math.max(Math.abs(chosen[0]), Math.abs(chosen[1])), first.unit);
  const lowest = values[0] ?? chosen[0];
  const highest = values.at(-1) ?? chosen[1];
  const room = (chosen[1] - chosen[0]) / 50;
  const beyond: readonly [boolean, boolean] =
    first.kind === 'angle' ? [false, false] : [lowest < chosen[0] - room, highest > chosen[1] + room];
  return { kind: first.kind, limits: chosen, beyond, factor, shownUnit: unit };
}

/** Level 1 to 255 of a value, 0 for a blank. */
export function colourLevel(scale: ColourScale, value: number): number {
  if (!Number.isFinite(value)) return 0;
  const [low, high] = scale.limits;
  const t = (value - low) / (high - low);
  if (scale.kind === 'angle') return 1 + Math.min(254, Math.floor((t - Math.floor(t)) * 255));
  return 1 + Math.round(254 * Math.min(1, Math.max(0, t)));
}

function automaticLimits(map: PanelMap, sorted: readonly number[]): readonly [number, number] {
  if (map.kind === 'angle') return [0, map.unit === 'rad' ? Math.PI : 180];
  if (map.kind === 'signed') {
    const sizes = sorted.map(Math.abs).sort((a, b) => a - b);
    const largest = sizes.at(-1) || 1;
    const usual = sizes[Math.ceil(0.995 * (sizes.length - 1))] || largest;
    const top = largest > WILD * usual ? usual : largest;
    return [-top, top];
  }
  const [low, high] = [sorted[0] ?? 0, sorted.at(-1) ?? 1];
  if (high > low && low > high / 2) return [low, high];
  return high > 0 ? [0, high] : low < high ? [low, high] : [0, 1];
}
