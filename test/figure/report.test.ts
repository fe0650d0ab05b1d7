import { describe, expect, it } from 'vitest';
import { lineUpTable } from '../../src/figure/line-up.ts';
import { methodsText } from '../../src/figure/methods-text.ts';
import { overviewSvg, wrapped } from '../../src/figure/overview.ts';
import type { Overview } from '../../src/figure/overview.ts';
import { reportHtml } from '../../src/figure/report.ts';
import { sampleMaps, sampleSectors } from './sample.ts';
import { sampleReport } from './sample-report.ts';
import { expectWellFormed } from './well-formed.ts';

const count = (text: string, pattern: RegExp): number => text.match(pattern)?.length ?? 0;

describe('overview', () => {
  const { p, rm, orientation } = sampleMaps();
  const overview: Overview = {
    title: 'Lantern & <Wheel>',
    subtitle: 'inclination 38°',
    columns: ['observed', 'model'],
    rows: [
      {
        label: 'P, 1.4 GHz',
        maps: [{ map: p, orientation }, { map: { ...p, values: Array.from(p.values, (v) => v / 2) }, orientation }],
        profile: { quantity: 'P', unit: 'Jy/beam', curves: [{ label: 'model', ...sampleSectors(0.5) }] },
      },
      { label: 'RM', maps: [undefined, { map: rm }] },
    ],
    notes: ['Hatched: blank.'],
  };

  it('is well formed, has no ids to clash on a page, and repeats byte for byte', (context) => {
    const svg = overviewSvg(overview);
    expectWellFormed(context, svg);
    expect(svg).not.toMatch(/NaN|undefined| id="/);
    expect(overviewSvg(structuredClone(overview))).toBe(svg);
  });

  it('has a colour bar a row and words that stay text', () => {
    const svg = overviewSvg(overview);
    expect(count(svg, /<image/g)).toBe(3 + 2);
    for (const words of ['Lantern &amp; &lt;Wheel&gt;', 'observed', 'P, 1.4 GHz', 'RM', 'rad m⁻²', 'µJy/beam', 'Hatched: blank.']) expect(svg).toContain(`>${words}<`);
    expect(svg).toContain('DejaVu Sans');
  });

  it('gives low maps rows as high as their colour bar', () => {
    const low = { ...p, values: new Float64Array(97 * 7).fill(1e-4), ny: 7 };
    const row = { label: 'a', maps: [{ map: low }] };
    const [one, two] = [[row], [row, row]].map((rows) => overviewSvg({ title: 't', columns: ['model'], rows }));
    const height = (svg: string): number => Number(/ height="([\d.]+)"/.exec(svg)?.[1]);
    const bars = [...two.matchAll(/<image[^>]*width="9" height="([\d.]+)"/g)].map((m) => Number(m[1]));
    expect(bars.length).toBe(2);
    expect(height(two) - height(one)).toBeGreaterThan(bars[0] + 24);
    expect(two).toContain('>north (arcsec)<');
  });

  it('refuses a row of maps in different units', () => {
    expect(() => overviewSvg({ ...overview, rows: [{ label: 'x', maps: [{ map: p }, { map: rm }] }] })).toThrow(/cannot share/);
  });

  it('breaks long lines at spaces', () => {
    expect(wrapped('one two three', 45, 10)).toEqual(['one two', 'three']);
    expect(wrapped('', 45, 10)).toEqual([]);
  });
});

describe('report', () => {
  const html = reportHtml(sampleReport());

  it('is one page that needs nothing else', () => {
    expect(html.startsWith('<!DOCTYPE html>\n<html lang="en">')).toBe(true);
    expect(html).not.toMatch(/<script|<link|<iframe|@import|url\(/);
    for (const [, target] of html.matchAll(/(?:href|src)="([^"]*)"/g)) expect(target).toMatch(/^data:image\/png;base64,/);
    expect(html.replaceAll('http://www.w3.org/2000/svg', '')).not.toContain('http');
    expect(html).toContain('prefers-color-scheme:dark');
  });

  it('is well-formed XML as well, and repeats byte for byte', (context) => {
    expectWellFormed(context, html);
    expect(reportHtml(sampleReport())).toBe(html);
  });

  it('meets the basics of access: language, title, headings in order, captions, scopes, names of pictures', () => {
    expect(html).toMatch(/<title>The Lantern Wheel<\/title>/);
    expect(count(html, /<h1>/g)).toBe(1);
    const levels = [...html.matchAll(/<h([1-6])>/g)].map((m) => Number(m[1]));
    levels.slice(1).forEach((level, k) => expect(level - levels[k]).toBeLessThanOrEqual(1));
    expect(count(html, /<main>/g)).toBe(1);
    expect(count(html, /<table/g)).toBe(count(html, /<table[^>]*><caption>[^<]+<\/caption>/g));
    for (const [tag] of html.matchAll(/<th[ >][^>]*/g)) expect(tag).toMatch(/scope="(col|row)"/);
    expect(html).not.toMatch(/<th[^>]*><\/th>/);
    const pictures = [...html.matchAll(/<svg xmlns[^>]*>/g)].map((m) => m[0]);
    expect(pictures.length).toBe(7 + 2 + 4); // maps, colour bars, profiles
    for (const picture of pictures) expect(picture).toMatch(/role="img" aria-label="[^"]+"/);
    expect(new Set(pictures.map((picture) => /aria-label="([^"]+)"/.exec(picture)?.[1])).size).toBe(13);
    for (const [region] of html.matchAll(/<div class="scroll"[^>]*>/g)) expect(region).toMatch(/role="region" aria-label="[^"]+" tabindex="0"/);
    expect(html).not.toContain(' id="');
  });

  it('says everything: question, answer, ranking, values, data, caveats, methods, provenance', () => {
    for (const words of [
      'Which halo makes the receding side fade?', 'The data prefer “helical halo” to “cored quadrupole” decisively.', '1. helical halo', '+412.7',
      '2.35 ± 0.12 µG', '38.2° +0.9° −0.6°', 'Shukurov &amp; Subramanian 2021, ch. 13', 'IAU signs: the header says so.', 'The distance was held at 10 Mpc.',
      'Burn 1966, MNRAS 133, 67', 'gyrelight rank study.yaml --seed 7', 'No odd asymmetry before the beam.', 'disc &lt;alone&gt; &amp; &quot;bare&quot;',
    ]) expect(html).toContain(words);
    expect(html).not.toMatch(/NaN|undefined|<alone>/);
  });

  it('adds a column of evidences where there are any, and shows blanks as such', () => {
    const report = sampleReport();
    const [first, ...others] = report.hypotheses;
    const page = reportHtml({ ...report, hypotheses: [{ ...first, deltaLnEvidence: 0, chi2PerN: NaN }, ...others] });
    expect(html).not.toContain('Δ ln Z');
    expect(page).toContain('Δ ln Z');
    expect(page).toContain('χ²/N —');
  });

  it('refuses a row with a cell too few', () => {
    expect(() => lineUpTable(['a', 'b'], [{ kind: 'words', label: 'x', models: ['1'] }], '')).toThrow(/1 models for 2 hypotheses/);
  });

  it('leaves out the column of the observation where there is none', () => {
    const table = lineUpTable(['a'], [{ kind: 'words', label: 'x', models: ['1'] }], 'c');
    expect(table).not.toContain('observation');
    expect(count(table, /<td/g)).toBe(2);
  });
});

describe('methods paragraph', () => {
  it('cites what it used and nothing else', () => {
    const plain = methodsText({ tolerance: 1e-4 });
    expect(plain.citations.map((line) => line.split(',')[0])).toEqual(['Burn 1966', 'Rybicki & Lightman 1979']);
    const full = methodsText({
      tolerance: 1e-5, turbulence: true, equipartition: true, freeFree: true, beam: true, noise: true, debiased: true, rotationMeasure: 'synthesis', fit: 'nested',
    });
    // Every work named in the text is in the list.
    const named = [...full.paragraph.matchAll(/[(;] ?([A-Z][^();]*? \d{4})/g)].map((m) => m[1].trim());
    expect(named.length).toBeGreaterThan(8);
    for (const work of named) expect(full.citations.some((line) => line.startsWith(`${work},`))).toBe(true);
    expect([...full.citations].sort()).toEqual([...full.citations]);
    expect(full.paragraph).not.toContain('undefined');
  });
});
