import type { Channel } from '../sky/types.ts';
import { makeTable } from './fits-table.ts';
import type { Card, TableHdu } from './fits-types.ts';
import type { ThirdAxis } from './sky-header.ts';
import { CHANNEL_TABLE } from './sky-header.ts';

/** Of a channel's spacing: frequencies nearer than this to an even grid are on it, but for rounding. */
const EVENNESS = 1e-6;

/**
 * The frequency axis of a cube: linear where the channels are equally spaced and share width and
 * noise (one channel does), else a FREQ-TAB axis (Greisen et al. 2006, section 6) with a table of
 * frequency, width and noise. Throws RangeError without a channel.
 */
export function frequencyAxis(channels: readonly Channel[], noise: ArrayLike<number>): { axis: ThirdAxis; table?: TableHdu } {
  const count = channels.length;
  if (count === 0 || noise.length !== count) throw new RangeError(`${count} channels with ${noise.length} values of noise`);
  const first = channels[0];
  const step = count === 1 ? first.widthHz || 1 : (channels[count - 1].frequencyHz - first.frequencyHz) / (count - 1);
  const isEven = channels.every(
    ({ frequencyHz, widthHz }, k) =>
      Math.abs(frequencyHz - first.frequencyHz - k * step) <= EVENNESS * Math.abs(step) &&
      Math.abs(widthHz - first.widthHz) <= EVENNESS * first.widthHz &&
      noise[k] === noise[0],
  );
  const isLinear = isEven && step !== 0;
  const common = { cunit: 'Hz', crpix: 1, length: count };
  if (isLinear) {
    return { axis: { ...common, ctype: 'FREQ', crval: first.frequencyHz, cdelt: step, cards: channelCards(first, noise[0]) } };
  }
  return {
    // The index of the table is the pixel coordinate itself.
    axis: { ...common, ctype: 'FREQ-TAB', crval: 1, cdelt: 1, cards: lookupCards() },
    table: channelTable(channels, noise),
  };
}

function channelCards(channel: Channel, noise: number): Card[] {
  return [
    { keyword: 'CHANWID', value: channel.widthHz, comment: '[Hz] width of a channel, 0: monochromatic' },
    { keyword: 'NOISE', value: noise, comment: 'rms per channel in BUNIT, 0: none' },
  ];
}

function lookupCards(): Card[] {
  return [
    { keyword: 'PS3_0', value: CHANNEL_TABLE, comment: 'table of the coordinates' },
    { keyword: 'PS3_1', value: 'FREQ', comment: 'column of the coordinates' },
    { keyword: 'PV3_1', value: 1, comment: 'EXTVER of the table' },
    { keyword: 'PV3_2', value: 1, comment: 'EXTLEVEL of the table' },
    { keyword: 'PV3_3', value: 1, comment: 'axis of the coordinate array' },
  ];
}

/** One row, as lookup tables have; each cell is an array over the channels. */
function channelTable(channels: readonly Channel[], noise: ArrayLike<number>): TableHdu {
  const repeat = channels.length;
  return makeTable(
    CHANNEL_TABLE,
    [
      { name: 'FREQ', unit: 'Hz', letter: 'D', repeat, dimensions: [1, repeat], numbers: channels.map((c) => c.frequencyHz) },
      { name: 'WIDTH', unit: 'Hz', letter: 'D', repeat, numbers: channels.map((c) => c.widthHz) },
      { name: 'NOISE', letter: 'D', repeat, numbers: noise },
    ],
    [
      { keyword: 'EXTVER', value: 1 },
      { keyword: 'EXTLEVEL', value: 1 },
    ],
  );
}
