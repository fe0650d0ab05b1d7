import type { Beam } from '../scene/types.ts';
import type { Channel } from '../sky/types.ts';
import type { Axis } from './fits-axes.ts';
import { findNumber } from './fits-header.ts';
import type { Card, FitsHdu, FitsPlace } from './fits-types.ts';
import { fitsError } from './fits-types.ts';
import type { FrequencyList } from './frequency-read.ts';
import { readFrequencies } from './frequency-read.ts';
import type { SkyImageOverrides } from './sky-image.ts';
import { ARCSEC_PER_DEGREE, DEGREES_PER_RADIAN } from './sky-header.ts';

interface ChannelSource {
  /** The frequency axis, where there is one. */
  readonly axis: Axis | undefined;
  readonly step: number;
  readonly cards: readonly Card[];
  readonly hdus: readonly FitsHdu[];
  readonly overrides: SkyImageOverrides;
  readonly place: FitsPlace;
}

/**
 * Frequencies, widths and noise of an image's channels: what the user states, else the axis, else
 * the keywords FREQ or RESTFRQ. What is assumed is added to `notes`. Throws InputError where a
 * stated list does not fit the axis.
 */
export function readChannels(source: ChannelSource, notes: string[]): { channels?: Channel[]; noise?: number[] } {
  const { axis, cards, overrides, place } = source;
  const count = axis?.length ?? 1;
  const list = listFrequencies(source, notes);
  const noise = repeated(overrides.noise ?? findNumber(cards, 'NOISE', place), count) ?? list?.noise?.slice();
  const stated = repeated(overrides.widthHz ?? findNumber(cards, 'CHANWID', place), count) ?? list?.widthsHz;
  if (list === undefined) return noise ? { noise } : {};
  const widths = stated ?? assumedWidths(list, place, notes);
  const wrong = widths.find((width) => !(width >= 0));
  if (wrong !== undefined) throw fitsError(place, `the width of a channel is ${wrong} Hz; allowed: 0 or more`);
  const channels = list.frequenciesHz.map((frequencyHz, k) => ({ frequencyHz, widthHz: widths[k] }));
  return { channels, ...(noise && { noise }) };
}

function listFrequencies({ axis, step, cards, hdus, overrides, place }: ChannelSource, notes: string[]): FrequencyList | undefined {
  const stated = overrides.frequencyHz;
  if (stated !== undefined) {
    const frequenciesHz = typeof stated === 'number' ? [stated] : stated;
    const count = axis?.length ?? 1;
    if (frequenciesHz.length !== count) {
      throw fitsError(place, `${frequenciesHz.length} frequencies are stated for an image of ${count} channel${count > 1 ? 's' : ''}`);
    }
    return { frequenciesHz };
  }
  if (axis) return readFrequencies(axis, step, cards, hdus, place);
  for (const keyword of ['FREQ', 'RESTFRQ', 'RESTFREQ']) {
    const frequency = findNumber(cards, keyword, place);
    if (frequency === undefined || frequency === 0) continue;
    if (frequency < 0) throw fitsError(place, `${keyword} = ${frequency} Hz; allowed: above 0`);
    notes.push(`${place.hdu}: without a frequency axis, the frequency is ${keyword} = ${frequency} Hz`);
    return { frequenciesHz: [frequency] };
  }
  return undefined;
}

function assumedWidths(list: FrequencyList, place: FitsPlace, notes: string[]): number[] {
  const width = list.spacingHz ?? 0;
  notes.push(
    width > 0
      ? `${place.hdu}: the header states no channel width; taken as the spacing of the channels, ${width} Hz`
      : `${place.hdu}: the header states no channel width; channels are taken as monochromatic`,
  );
  return list.frequenciesHz.map(() => width);
}

function repeated(value: number | undefined, count: number): number[] | undefined {
  return value === undefined ? undefined : new Array<number>(count).fill(value);
}

/**
 * The beam by BMAJ, BMIN and BPA (degrees), undefined where there is none. Throws InputError where
 * they are not whole, or the header says that the beam differs from channel to channel.
 */
export function readBeam(cards: readonly Card[], place: FitsPlace): Beam | undefined {
  // A logical keyword that ends in MBM marks multiple beams (common practice, not in the standard).
  const many = cards.find(({ keyword, value }) => keyword.endsWith('MBM') && value === true);
  if (many) throw fitsError(place, `${many.keyword} = T: each channel has a beam of its own; bring them to one beam, or state it`);
  const major = findNumber(cards, 'BMAJ', place) ?? 0;
  const minor = findNumber(cards, 'BMIN', place) ?? 0;
  const angle = findNumber(cards, 'BPA', place);
  if (major === 0 && minor === 0) return undefined;
  if (!(minor > 0 && major >= minor)) throw fitsError(place, `BMAJ = ${major}, BMIN = ${minor}; allowed: BMAJ >= BMIN > 0`);
  if (angle === undefined && major > minor) throw fitsError(place, 'BPA is missing for an elliptical beam');
  return {
    majorArcsec: major * ARCSEC_PER_DEGREE,
    minorArcsec: minor * ARCSEC_PER_DEGREE,
    angle: (angle ?? 0) / DEGREES_PER_RADIAN,
  };
}
