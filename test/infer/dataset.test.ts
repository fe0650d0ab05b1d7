import { describe, expect, it } from 'vitest';
import { readFits } from '../../src/files/fits-read.ts';
import { skyImageFromFits } from '../../src/files/sky-fits-read.ts';
import { stokesFits } from '../../src/files/sky-fits-write.ts';
import { makeDataSet } from '../../src/infer/dataset.ts';
import type { LoadedEntry } from '../../src/infer/dataset.ts';
import type { ReadMap } from '../../src/infer/map-facts.ts';
import { refuseNoOverlap } from '../../src/infer/overlap.ts';
import type { DataEntry } from '../../src/infer/study-types.ts';
import type { Galaxy } from '../../src/scene/types.ts';
import type { StokesCube } from '../../src/sky/types.ts';
import { testAxes } from './grids.ts';

const axes = testAxes(3, 2, 4);
const beam = { majorArcsec: 15, minorArcsec: 12, angle: Math.PI / 6 };
const place = { file: 'a.study.yaml', line: 4, column: 5 };
const text = (value: string) => ({ text: value, place: { ...place, column: 30 } });

const map = (changes: Partial<ReadMap> = {}): ReadMap => ({
  file: 'q.fits', ...axes, stokes: [], values: Float64Array.of(1, 2, 3, 4, 5, NaN),
  channels: [{ frequencyHz: 1.4e9, widthHz: 1e7 }], unit: 'Jy/beam', beam, ...changes,
});
const entry = (changes: Partial<DataEntry> = {}): DataEntry => ({ quantity: 'Q', files: ['q.fits'], noise: text('20 uJy/beam'), place, ...changes });
const loaded = (entryChanges: Partial<DataEntry> = {}, mapChanges: Partial<ReadMap> = {}, more: Partial<LoadedEntry> = {}): LoadedEntry => ({
  entry: entry(entryChanges), maps: [map(mapChanges)], ...more,
});
const values = (item: LoadedEntry): number[] => Array.from(makeDataSet([item]).planes[0].values);

describe('makeDataSet', () => {
  it('takes maps as they are and says what it assumed', () => {
    const data = makeDataSet([loaded(), loaded({ quantity: 'U' }, { file: 'u.fits' })]);
    expect(data.bands).toEqual([{ name: '1.4 GHz', channels: [{ frequencyHz: 1.4e9, widthHz: 1e7 }], beam }]);
    expect(data.planes.map(({ quantity, band, channel }) => [quantity, band, channel])).toEqual([['Q', 0, 0], ['U', 0, 0]]);
    expect(data.planes[0]).toMatchObject({ noise: 2e-5, correlation: beam });
    expect(Array.from(data.planes[0].values)).toEqual([1, 2, 3, 4, 5, NaN]);
    expect(data.unit).toBe('Jy/beam');
    expect(data.axes).toEqual(axes);
    expect(data.assumptions.slice(0, 7)).toEqual([
      'q.fits: beam 15 x 12 arcsec at 30 deg from the header.',
      'q.fits: noise assumed correlated as the beam; state `correlation` where it is not.',
      'q.fits: signs assumed as IAU (angles from north through east); state `convention: IAU` or `U-reversed`.',
      'q.fits: angles assumed to be those of the electric vector; state `angleOf: E` or `B`.',
      'q.fits: zero level assumed right (`zeroLevel`).',
      'q.fits: noise 20 uJy/beam assumed the same in all pixels and channels.',
      'q.fits: 1 blank values of 6 left out.',
    ]);
  });

  it('assumes nothing about signs, beam and zero level that were stated', () => {
    const stated = loaded({ convention: 'IAU', angleOf: 'E', beam, zeroLevel: text('0 Jy/beam'), correlationArcsec: 20 });
    const { assumptions } = makeDataSet([stated]);
    expect(assumptions.filter((sentence) => /signs|electric|header|assumed right|correlated/.test(sentence))).toEqual([]);
  });

  it('brings signs to the IAU convention', () => {
    expect(values(loaded({ convention: 'U-reversed' }))[0]).toBe(1);
    expect(values(loaded({ quantity: 'U', convention: 'U-reversed' }))[0]).toBe(-1);
    expect(values(loaded({ angleOf: 'B' }))[0]).toBe(-1);
    expect(values(loaded({ quantity: 'U', angleOf: 'B' }))[0]).toBe(-1);
    expect(values(loaded({ quantity: 'U', angleOf: 'B', convention: 'U-reversed' }))[0]).toBe(1);
    expect(values(loaded({ quantity: 'I' }))[0]).toBe(1);
    const { assumptions } = makeDataSet([loaded({ quantity: 'U', convention: 'U-reversed', angleOf: 'B' })]);
    expect(assumptions).toContain('q.fits: U changed in sign, because it is reversed.');
    expect(assumptions).toContain("q.fits: U changed in sign, because `angleOf: B` means angles 90 deg from the electric vector's.");
  });

  it('takes the convention of a header, unless the study says another', () => {
    const reversed = { convention: 'U-reversed' } as const;
    expect(values(loaded({ quantity: 'U' }, reversed))[0]).toBe(-1);
    expect(values(loaded({ quantity: 'U', convention: 'IAU' }, reversed))[0]).toBe(1);
    expect(makeDataSet([loaded({ quantity: 'U' }, reversed)]).assumptions).toContain('q.fits: signs are U-reversed by its header.');
    expect(makeDataSet([loaded({ quantity: 'U', convention: 'IAU' }, reversed)]).assumptions).toContain(
      'q.fits: its header says that signs are U-reversed; `convention: IAU` was followed instead.',
    );
  });

  it('takes its Stokes parameter out of a cube of several, and notes and noise out of the header', () => {
    const cube = { stokes: ['I', 'Q', 'U'], values: Float64Array.from({ length: 18 }, (_, p) => p), noise: [0.25], notes: ['HDU 0: odd.'] };
    const { planes, assumptions } = makeDataSet([loaded({ noise: undefined }, cube), loaded({ quantity: 'U', noise: undefined }, cube)]);
    expect(Array.from(planes[0].values)).toEqual([6, 7, 8, 9, 10, 11]);
    expect(planes[1].values[0]).toBe(12);
    expect(planes[1].noise).toBe(0.25);
    expect(assumptions).toContain('q.fits: noise from the header, assumed the same in all pixels.');
    expect(assumptions).toContain('q.fits: HDU 0: odd.');
  });

  it('subtracts zero levels before it turns signs, in any unit', () => {
    expect(values(loaded({ quantity: 'U', convention: 'U-reversed', zeroLevel: text('500 mJy/beam') }))[0]).toBe(-0.5);
    const milli = loaded({ zeroLevel: text('500 mJy/beam') }, { unit: 'mJy/beam' });
    // Rounding.
    expect(Math.abs(values(milli)[1] - (0.002 - 0.5))).toBeLessThan(1e-15);
    expect(values(loaded({ unit: text('mJy/beam') }, { unit: '' }))[1]).toBe(0.002);
  });

  it('knows the unit of old headers', () => {
    expect(makeDataSet([loaded({}, { unit: 'JY/BEAM' })]).unit).toBe('Jy/beam');
  });

  it('masks', () => {
    const mask = map({ file: 'm.fits', values: Float64Array.of(1, 0, NaN, 1, 1, 1) });
    expect(values(loaded({}, {}, { mask }))).toEqual([1, NaN, NaN, 4, 5, NaN]);
  });

  it('reads noise maps, one for all channels or one each', () => {
    const channels = [1.4e9, 1.5e9].map((frequencyHz) => ({ frequencyHz, widthHz: 0 }));
    const cube = { channels, values: new Float64Array(12) };
    const one = map({ file: 'n.fits', unit: 'mJy/beam', values: Float64Array.of(1, 2, 3, 4, 5, 6) });
    const planes = (noiseMap: ReadMap) => makeDataSet([loaded({ noise: undefined, noiseMap: 'n.fits' }, cube, { noiseMap })]).planes;
    expect(planes(one).map(({ noise }) => (noise as Float64Array)[1])).toEqual([0.002, 0.002]);
    const two = { ...one, values: Float64Array.from({ length: 12 }, (_, p) => p) };
    expect(planes(two).map(({ noise }) => (noise as Float64Array)[1])).toEqual([0.001, 0.007]);
    expect(() => planes({ ...one, values: new Float64Array(18) })).toThrow('holds 3 planes; allowed: 1, or 2');
  });

  it('gathers channels with the same beam into bands', () => {
    const at = (file: string, frequencyHz: number, major: number) =>
      map({ file, channels: [{ frequencyHz, widthHz: 1e7 }], beam: { ...beam, majorArcsec: major } });
    const item = (quantity: 'Q' | 'U'): LoadedEntry => ({
      entry: entry({ quantity, files: ['a', 'b'] }),
      // Headers of Q and U may differ in the last digits of a frequency.
      maps: [at(`${quantity}1`, quantity === 'Q' ? 1.4e9 : 1.4e9 + 1e-3, 20), at(`${quantity}2`, 4.8e9, 15)],
    });
    const { bands, planes } = makeDataSet([item('Q'), item('U')]);
    expect(bands.map(({ name }) => name)).toEqual(['1.4 GHz', '4.8 GHz']);
    expect(planes.map(({ quantity, band }) => `${quantity}${band}`)).toEqual(['Q0', 'Q1', 'U0', 'U1']);
    const files = [1.4e9, 1.5e9].map((frequencyHz) => map({ channels: [{ frequencyHz, widthHz: 0 }] }));
    const one = makeDataSet([{ entry: entry(), maps: files }]);
    expect(one.bands.map(({ name, channels }) => [name, channels.length])).toEqual([['1.45 GHz', 2]]);
    expect(one.planes.map(({ channel }) => channel)).toEqual([0, 1]);
    const beams = makeDataSet([loaded({}, { beam: { ...beam, majorArcsec: 20 } }), loaded({ quantity: 'U' })]).bands;
    expect(beams.map(({ name }) => name)).toEqual(['1.4 GHz (1)', '1.4 GHz (2)']);
  });

  it('takes noise as independent where that is said or there is no beam', () => {
    expect(makeDataSet([loaded({ correlationArcsec: 0 })]).planes[0].correlation).toBeUndefined();
    expect(makeDataSet([loaded({ correlationArcsec: 20 })]).planes[0].correlation).toEqual({ majorArcsec: 20, minorArcsec: 20, angle: 0 });
    const sharp = makeDataSet([loaded({ noise: text('2 Jy/sr') }, { unit: 'Jy/sr', beam: undefined })]);
    expect(sharp.planes[0].correlation).toBeUndefined();
    expect(sharp.assumptions).toContain('q.fits: no beam is stated; assumed sharp, each pixel a sightline.');
    expect(sharp.assumptions).toContain('q.fits: noise assumed independent from pixel to pixel.');
    expect(makeDataSet([loaded({ correlationArcsec: 2 })]).assumptions.join()).toContain('covers less than a pixel');
  });

  it('says when it assumed a channel width', () => {
    const { bands, assumptions } = makeDataSet([loaded({ frequencyHz: 1.6e9 }, { channels: undefined })]);
    expect(bands[0].channels[0]).toEqual({ frequencyHz: 1.6e9, widthHz: 0 });
    expect(assumptions[0]).toContain('no channel width is stated');
    expect(makeDataSet([loaded({ widthHz: 2e7 })]).bands[0].channels[0].widthHz).toBe(2e7);
  });

  const wrong: [string, () => LoadedEntry[], RegExp][] = [
    ['no data', () => [], /a study needs data/],
    ['no frequency', () => [loaded({}, { channels: undefined })], /^a\.study\.yaml:4:5: q\.fits does not say its frequency; add `frequency: 1\.4 GHz`/],
    ['a cube without frequencies', () => [loaded({}, { channels: undefined, values: new Float64Array(12) })], /holds 2 planes without frequencies/],
    ['a frequency against the header', () => [loaded({ frequencyHz: 1.5e9 })], /`frequency` contradicts the header of q\.fits \(1400000000 Hz\)/],
    ['no beam', () => [loaded({}, { beam: undefined })], /:4:5: q\.fits is in Jy\/beam but does not say its beam; add `beam: \{major: /],
    ['no noise', () => [loaded({ noise: undefined })], /no noise is stated for q\.fits; add `noise: 20 uJy\/beam`/],
    ['no unit', () => [loaded({}, { unit: '' })], /does not say its unit; add `unit: Jy\/beam`/],
    ['kelvins', () => [loaded({}, { unit: 'K' })], /q\.fits is in K; allowed: Jy\/beam and Jy\/sr/],
    ['capitals that hide milli or mega', () => [loaded({}, { unit: 'MJY/BEAM' })], /q\.fits is in MJY\/BEAM; allowed/],
    ['a nameless unit', () => [loaded({}, { unit: 'COUNTS' })], /q\.fits is in COUNTS; allowed/],
    ['noise in another unit', () => [loaded({ noise: text('2 Jy/sr') })], /^a\.study\.yaml:4:30: "2 Jy\/sr" is a surface brightness/],
    ['noise of 0', () => [loaded({ noise: text('0 Jy/beam') })], /a noise of 0 Jy\/beam is given; allowed: above 0/],
    ['two units', () => [loaded(), loaded({ quantity: 'U', noise: text('1 Jy/sr') }, { unit: 'Jy/sr' })], /is in Jy\/sr, other maps in Jy\/beam/],
    ['another size', () => [loaded(), loaded({ quantity: 'U' }, { file: 'u.fits', nx: 2, ny: 3 })], /u\.fits is on another grid than q\.fits/],
    ['another centre', () => [loaded(), loaded({ quantity: 'U' }, { wcs: { ...axes.wcs, decDeg: 20.001 } })], /another grid/],
    ['a mask elsewhere', () => [loaded({}, {}, { mask: map({ file: 'm.fits', wcs: { ...axes.wcs, crpixX: 1 } }) })], /m\.fits is on another grid/],
    ['another Stokes parameter', () => [loaded({}, { stokes: ['U'] })], /:4:5: q\.fits holds Stokes U by its header, not Q/],
    ['what is no Stokes parameter', () => [loaded({}, { quantity: 'chi' })], /q\.fits holds chi by its header, not Q/],
    ['a Faraday spectrum', () => [loaded({}, { depthsRadM2: [0] })], /q\.fits holds a Faraday spectrum by its header/],
    ['data given twice', () => [loaded(), loaded()], /Stokes Q at 1400000000 Hz is given twice/],
  ];
  for (const [what, items, message] of wrong) {
    it(`refuses ${what}`, () => expect(() => makeDataSet(items())).toThrow(message));
  }
});

describe('maps of this program', () => {
  it('come back from their FITS files as data, without a word in the study', () => {
    const frequencies = [1.3e9, 1.4e9, 1.5e9];
    const ramp = (first: number) => Float64Array.from({ length: 18 }, (_, p) => first + p);
    const cube: StokesCube = {
      band: 'L',
      grid: { nx: 3, ny: 2, pixelArcsec: 4, pixelKpc: 0.2, raDeg: 150, decDeg: 20, crpixX: 2, crpixY: 1.5 },
      channels: frequencies.map((frequencyHz) => ({ frequencyHz, widthHz: 1e8 })),
      I: ramp(0), Q: ramp(100), U: ramp(200), unit: 'Jy/beam', beam, noise: Float64Array.of(0.5, 0.5, 0.5),
    };
    const items = (['Q', 'U'] as const).map((quantity) => {
      const bytes = stokesFits(cube, quantity, { sceneText: 'gyrelight: 1', version: '0', seed: 1 }, 64);
      const file = `${quantity}-L.fits`;
      return { entry: entry({ quantity, noise: undefined }), maps: [{ file, ...skyImageFromFits(readFits(bytes, file), file) }] };
    });
    const data = makeDataSet(items);
    expect(data.planes.map(({ quantity, channel, values: [value] }) => [quantity, channel, value])).toEqual([
      ['Q', 0, 100], ['Q', 1, 106], ['Q', 2, 112], ['U', 0, 200], ['U', 1, 206], ['U', 2, 212],
    ]);
    expect(data.planes[0].noise).toBe(0.5);
    expect(data.bands).toHaveLength(1);
    data.bands[0].channels.forEach(({ frequencyHz, widthHz }, k) => {
      // Linear axes are kept as start and step: rounding.
      expect(Math.abs(frequencyHz / frequencies[k] - 1)).toBeLessThan(1e-14);
      expect(widthHz).toBe(1e8);
    });
    expect(data.assumptions).toContain('Q-L.fits: signs are IAU by its header.');
  });
});

describe('refuseNoOverlap', () => {
  const data = makeDataSet([loaded()]);
  const galaxy = (centre?: { raDeg: number; decDeg: number }, radiusKpc = 15): Galaxy => ({
    distanceKpc: 10_000, inclination: 1, positionAngle: 0, volume: { radiusKpc, heightKpc: 6 }, centre,
  });

  it('accepts data on the galaxy, at its edge too', () => {
    refuseNoOverlap(data, galaxy({ raDeg: 150, decDeg: 20 }));
    // 15 kpc at 10 Mpc are 309 arcsec, with the halo's height 333.
    refuseNoOverlap(data, galaxy({ raDeg: 150, decDeg: 20 + 330 / 3600 }));
  });

  it('refuses data beside it and galaxies without a place', () => {
    expect(() => refuseNoOverlap(data, galaxy({ raDeg: 150, decDeg: 20 + 340 / 3600 }))).toThrow(
      /do not show the model's galaxy: its centre is RA 150 deg/,
    );
    expect(() => refuseNoOverlap(data, galaxy({ raDeg: 330, decDeg: -20 }))).toThrow('do not show');
    expect(() => refuseNoOverlap(data, galaxy())).toThrow('it has no centre on the sky; add `galaxy: {centre: ');
  });
});
