import { describe, expect, it } from 'vitest';
import { makeDataSet } from '../../src/infer/dataset.ts';
import type { LoadedEntry } from '../../src/infer/dataset.ts';
import type { ReadMap } from '../../src/infer/map-facts.ts';
import { refuseNoOverlap } from '../../src/infer/overlap.ts';
import type { DataEntry } from '../../src/infer/study-types.ts';
import type { Galaxy } from '../../src/scene/types.ts';
import { testAxes } from './grids.ts';

const axes = testAxes(3, 2, 4);
const beam = { majorArcsec: 15, minorArcsec: 12, angle: Math.PI / 6 };
const place = { file: 'a.study.yaml', line: 4, column: 5 };
const text = (value: string) => ({ text: value, place: { ...place, column: 30 } });

const map = (changes: Partial<ReadMap> = {}): ReadMap => ({
  file: 'q.fits', ...axes, values: Float64Array.of(1, 2, 3, 4, 5, NaN),
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
    expect(assumptions).toContain('q.fits: U changed in sign, as `convention: U-reversed` asks.');
    expect(assumptions).toContain("q.fits: U changed in sign, because `angleOf: B` means angles 90 deg from the electric vector's.");
  });

  it('subtracts zero levels before it turns signs, in any unit', () => {
    expect(values(loaded({ quantity: 'U', convention: 'U-reversed', zeroLevel: text('500 mJy/beam') }))[0]).toBe(-0.5);
    const milli = loaded({ zeroLevel: text('500 mJy/beam') }, { unit: 'mJy/beam' });
    // Rounding.
    expect(Math.abs(values(milli)[1] - (0.002 - 0.5))).toBeLessThan(1e-15);
    expect(values(loaded({ unit: text('mJy/beam') }, { unit: undefined }))[1]).toBe(0.002);
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
    const { bands, assumptions } = makeDataSet([loaded({}, { channels: [{ frequencyHz: 1.4e9 }] })]);
    expect(bands[0].channels[0].widthHz).toBe(0);
    expect(assumptions[0]).toContain('no channel width is stated');
    expect(makeDataSet([loaded({ widthHz: 2e7 })]).bands[0].channels[0].widthHz).toBe(2e7);
    expect(makeDataSet([loaded({ frequencyHz: 1.6e9 }, { channels: undefined })]).bands[0].channels[0].frequencyHz).toBe(1.6e9);
  });

  const wrong: [string, () => LoadedEntry[], RegExp][] = [
    ['no data', () => [], /a study needs data/],
    ['no frequency', () => [loaded({}, { channels: undefined })], /^a\.study\.yaml:4:5: q\.fits does not say its frequency; add `frequency: 1\.4 GHz`/],
    ['a cube without frequencies', () => [loaded({}, { channels: undefined, values: new Float64Array(12) })], /holds 2 planes without frequencies/],
    ['a frequency against the header', () => [loaded({ frequencyHz: 1.5e9 })], /`frequency` contradicts the header of q\.fits \(1400000000 Hz\)/],
    ['no beam', () => [loaded({}, { beam: undefined })], /:4:5: q\.fits is in Jy\/beam but does not say its beam; add `beam: \{major: /],
    ['no noise', () => [loaded({ noise: undefined })], /no noise is stated for q\.fits; add `noise: 20 uJy\/beam`/],
    ['no unit', () => [loaded({}, { unit: undefined })], /does not say its unit; add `unit: Jy\/beam`/],
    ['kelvins', () => [loaded({}, { unit: 'K' })], /q\.fits is in K; allowed: Jy\/beam and Jy\/sr/],
    ['capitals that hide milli or mega', () => [loaded({}, { unit: 'MJY/BEAM' })], /q\.fits is in MJY\/BEAM; allowed/],
    ['a nameless unit', () => [loaded({}, { unit: 'COUNTS' })], /q\.fits is in COUNTS; allowed/],
    ['noise in another unit', () => [loaded({ noise: text('2 Jy/sr') })], /^a\.study\.yaml:4:30: "2 Jy\/sr" is a surface brightness/],
    ['noise of 0', () => [loaded({ noise: text('0 Jy/beam') })], /a noise of 0 Jy\/beam is given; allowed: above 0/],
    ['two units', () => [loaded(), loaded({ quantity: 'U', noise: text('1 Jy/sr') }, { unit: 'Jy/sr' })], /is in Jy\/sr, other maps in Jy\/beam/],
    ['another size', () => [loaded(), loaded({ quantity: 'U' }, { file: 'u.fits', nx: 2, ny: 3 })], /u\.fits is on another grid than q\.fits/],
    ['another centre', () => [loaded(), loaded({ quantity: 'U' }, { wcs: { ...axes.wcs, decDeg: 20.001 } })], /another grid/],
    ['a mask elsewhere', () => [loaded({}, {}, { mask: map({ file: 'm.fits', wcs: { ...axes.wcs, crpixX: 1 } }) })], /m\.fits is on another grid/],
    ['another Stokes parameter', () => [loaded({}, { quantity: 'U' })], /q\.fits holds Stokes U by its header, not Q/],
    ['data given twice', () => [loaded(), loaded()], /Stokes Q at 1400000000 Hz is given twice/],
  ];
  for (const [what, items, message] of wrong) {
    it(`refuses ${what}`, () => expect(() => makeDataSet(items())).toThrow(message));
  }
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
