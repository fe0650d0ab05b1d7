import { execFileSync } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import AxeBuilder from '@axe-core/playwright';
import { chromium, type Browser, type BrowserContext, type Download, type Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { servePage, type PageServer } from '../../src/cli/page-server.ts';
import { sceneOfPng, sceneOfSvg } from '../../src/figure/carried-scene.ts';
import { findProvenance } from '../../src/files/fits-scene.ts';
import { readFits } from '../../src/files/fits-read.ts';
import { skyImageFromFits } from '../../src/files/sky-fits-read.ts';

const executablePath = '/usr/bin/chromium';
const folder = 'scenes/lantern-wheel';

describe.skipIf(!existsSync(executablePath))('the page in Chromium (skipped where there is no /usr/bin/chromium: apt-get install chromium)', () => {
  const out = mkdtempSync(join(tmpdir(), 'gyrelight-page-test-'));
  let browser: Browser;
  let isolated: PageServer;
  let plain: PageServer;

  beforeAll(async () => {
    isolated = await servePage(resolve('dist/page'), 0);
    plain = await servePage(resolve('dist/page'), 0, false);
    // No graphics card and no WebGL: the page must not need them.
    browser = await chromium.launch({ executablePath, args: ['--no-sandbox', '--disable-gpu', '--disable-3d-apis'] });
  });

  afterAll(async () => {
    await browser?.close();
    await isolated?.close();
    await plain?.close();
    rmSync(out, { recursive: true, force: true });
  });

  /** A fresh page with what it complained of. */
  async function open(url = isolated.url, options: Parameters<Browser['newContext']>[0] = {}): Promise<{ page: Page; context: BrowserContext; complaints: string[] }> {
    const context = await browser.newContext({ viewport: { width: 1440, height: 1000 }, acceptDownloads: true, ...options });
    const page = await context.newPage();
    const complaints: string[] = [];
    page.on('console', (message) => void (message.type() === 'error' && complaints.push(message.text())));
    page.on('pageerror', (error) => complaints.push(error.message));
    await page.goto(url);
    await page.waitForSelector('.verdict', { timeout: 90_000 });
    return { page, context, complaints };
  }

  /** Waits until nothing is being drawn. */
  async function settled(page: Page): Promise<void> {
    await page.waitForFunction(() => [...document.querySelectorAll('.state')].every((state) => !/drawing|preview/.test(state.textContent ?? '')), undefined, { timeout: 90_000 });
  }

  async function save(download: Download): Promise<{ name: string; bytes: Uint8Array; path: string }> {
    const path = join(out, download.suggestedFilename());
    await download.saveAs(path);
    return { name: download.suggestedFilename(), bytes: readFileSync(path), path };
  }

  async function take(page: Page, label: string, kind: string): Promise<{ name: string; bytes: Uint8Array; path: string }> {
    const [download] = await Promise.all([page.waitForEvent('download'), page.getByLabel(label, { exact: true }).first().selectOption(kind)]);
    return save(download);
  }

  test('opens on the example study, changes by mouse and keyboard, and agrees with the command line', async () => {
    const { page, context, complaints } = await open();
    await settled(page);
    const columns = await page.locator('.column-head input').count();
    expect(columns).toBe(6);
    const before = await page.locator('.map img, .map svg').first().innerHTML();

    // By keyboard: a typed value with its unit; by mouse: a slider.
    const pitch = page.getByLabel('pitch', { exact: true });
    await pitch.fill('-0.5 rad');
    await pitch.press('Enter');
    expect(await pitch.inputValue()).toBe('-28.6479');
    const slider = page.getByLabel('strength, slider');
    const box = await slider.boundingBox();
    if (!box) throw new Error('the slider is not on the page');
    await page.mouse.click(box.x + 0.85 * box.width, box.y + box.height / 2);
    await settled(page);
    const strength = Number(await page.getByLabel('strength', { exact: true }).inputValue());
    expect(strength).not.toBe(5);
    expect(await page.locator('.map svg').nth(1).innerHTML()).not.toBe(before);

    // The same scene on the command line.
    const scene = await take(page, 'Take away', 'scene');
    const fits = await take(page, 'Take away: P, 1.40 GHz, disc alone', 'fits');
    const path = join(out, 'scene.yaml');
    writeFileSync(path, scene.bytes);
    const run = (arguments_: readonly string[]): string => execFileSync(process.execPath, ['dist/gyrelight.js', ...arguments_], { encoding: 'utf8', stdio: ['ignore', 'pipe', 'pipe'] });
    run(['compare', path, `${folder}/lantern-wheel.study.yaml`, '--out', join(out, 'compare'), '--quiet']);
    const map = skyImageFromFits(readFits(fits.bytes, fits.name), fits.name);
    const other = (name: string): Float64Array => {
      const file = join(out, 'compare', name);
      return Float64Array.from(skyImageFromFits(readFits(readFileSync(file), file), file).values);
    };
    const [q, u] = [other('model-Q-1.4GHz.fits'), other('model-U-1.4GHz.fits')];
    const largest = Math.max(...map.values);
    expect(largest).toBeGreaterThan(1e-6);
    // 1e-6 of the largest: the command line's files have 32 bits.
    map.values.forEach((value, k) => expect(Math.abs(value - Math.hypot(q[k], u[k]))).toBeLessThan(1e-6 * largest));
    expect(findProvenance(readFits(fits.bytes, fits.name), fits.name)?.sceneText).toBe(new TextDecoder().decode(scene.bytes));

    // Undo, twice, and the first picture is back; redo brings the change again.
    await page.getByLabel('Undo').click();
    await page.getByLabel('Undo').click();
    await settled(page);
    expect(await pitch.inputValue()).toBe('-18');
    await page.keyboard.press('Control+Shift+Z');
    expect(await pitch.inputValue()).toBe('-28.6479');

    // What is kept survives a reload.
    await page.waitForTimeout(600);
    await page.reload();
    await page.waitForSelector('.verdict', { timeout: 90_000 });
    expect(await page.getByLabel('pitch', { exact: true }).inputValue()).toBe('-28.6479');
    expect(complaints).toEqual([]);
    await context.close();
  });

  test('wrong numbers, text and formulas say what is wrong in their place and keep the last good picture', async () => {
    const { page, context, complaints } = await open();
    await settled(page);
    const pictures = await page.locator('.map').count();
    const pitch = page.getByLabel('pitch', { exact: true });
    await pitch.fill('3 kpc');
    await pitch.press('Enter');
    expect(await page.locator('.knob .trouble').textContent()).toMatch(/an angle is wanted/);
    await page.getByRole('tab', { name: 'as text' }).click();
    const text = page.getByLabel('Scene of disc alone as text');
    const good = await text.inputValue();
    await text.fill(good.replace(/field:[\s\S]*?thermalElectrons/, 'field:\n  - {model: formula, name: own, parameters: {S: 1 uG}, field: {phi: "S*exp(-q/3)"}}\nthermalElectrons'));
    const problem = page.locator('.problem');
    await problem.waitFor();
    expect(await problem.textContent()).toMatch(/unknown name|"q"/);
    // The mark stands under the offending character.
    const [line, mark] = ((await problem.locator('pre').textContent()) ?? '').split('\n');
    expect(line[mark.indexOf('▲')]).toBe('q');
    await page.waitForTimeout(600);
    expect(await page.locator('.map').count()).toBe(pictures);
    await text.fill(good);
    await problem.waitFor({ state: 'detached' });
    expect(complaints).toEqual([]);
    await context.close();
  });

  test('takes in foreign maps and says why others cannot be used; works without isolation headers', async () => {
    const { page, context, complaints } = await open(plain.url);
    expect(await page.evaluate(() => crossOriginIsolated)).toBe(false);
    const chooser = page.getByLabel('Files to open');
    const broken = join(out, 'broken.fits');
    writeFileSync(broken, new TextEncoder().encode('SIMPLE  =                    T'));
    await chooser.setInputFiles([`${folder}/observation/Q-L20.fits`, `${folder}/observation/U-L20.fits`, broken]);
    await page.waitForFunction(() => /are the observation now/.test(document.querySelector('.notice')?.textContent ?? ''));
    expect(await page.locator('.notice').textContent()).toMatch(/broken\.fits cannot be used/);
    await settled(page);
    await page.getByLabel('Undo').click();
    await settled(page);
    expect(complaints).toEqual([]);
    await context.close();
  });

  test('ranks three hypotheses, keeps and opens the page again', async () => {
    const { page, context, complaints } = await open();
    await settled(page);
    for (const name of ['point-like quadrupole', 'bisymmetric mode', 'cored quadrupole']) await page.getByLabel(`More for ${name}`).selectOption('drop');
    expect(await page.locator('.column-head input').count()).toBe(3);
    await page.getByRole('button', { name: 'rank', exact: true }).click();
    await page.waitForFunction(() => /prefer/.test(document.querySelector('.notice')?.textContent ?? ''), undefined, { timeout: 240_000 });
    expect(await page.locator('.notice').textContent()).toMatch(/prefer "helical halo"/);
    // The fit is the command line's: the generating geometry comes down to its noise.
    expect((await page.locator('.verdict').allTextContents()).join(' ')).toMatch(/1\. χ²\/N 0\.9\d/);
    const kept = await take(page, 'Take away', 'page');
    await page.getByLabel('Start from').selectOption('study');
    await page.waitForFunction(() => document.querySelectorAll('.column-head input').length === 6);
    await page.getByLabel('Files to open').setInputFiles(kept.path);
    await page.waitForFunction(() => document.querySelectorAll('.column-head input').length === 3);
    expect(complaints).toEqual([]);
    await context.close();
  }, 300_000);

  test('every picture can be taken away with its scene inside', async () => {
    const { page, context, complaints } = await open();
    await settled(page);
    const label = 'Take away: P, 1.40 GHz, helical halo';
    const svg = await take(page, label, 'svg');
    const source = await take(page, 'Take away', 'page');
    expect(sceneOfSvg(new TextDecoder().decode(svg.bytes), svg.name)?.sceneText).toMatch(/helical-halo/);
    const png = await take(page, label, 'png');
    expect(sceneOfPng(png.bytes, png.name)?.sceneText).toMatch(/helical-halo/);
    const pdf = await take(page, label, 'pdf');
    expect(new TextDecoder('latin1').decode(pdf.bytes.subarray(0, 5))).toBe('%PDF-');
    const whole = await take(page, 'Take away', 'line-up-svg');
    expect(new TextDecoder().decode(whole.bytes)).toMatch(/helical halo/);
    expect(source.bytes.length).toBeGreaterThan(1e5);
    expect(complaints).toEqual([]);
    await context.close();
  });

  test('the close-up follows a place; axe finds nothing, in light and dark, wide and narrow', async () => {
    const { page, context, complaints } = await open();
    await settled(page);
    const clean = async (): Promise<void> => {
      const { violations } = await new AxeBuilder({ page }).analyze();
      expect(violations.map(({ id, nodes }) => `${id}: ${nodes.map(({ html }) => html.slice(0, 120)).join(' | ')}`)).toEqual([]);
    };
    await clean();
    await page.getByLabel('Dark page').click();
    await clean();
    await page.setViewportSize({ width: 800, height: 900 });
    await clean();
    expect(await page.evaluate(() => document.documentElement.scrollWidth <= innerWidth)).toBe(true);
    await page.setViewportSize({ width: 1440, height: 1000 });
    await page.getByRole('button', { name: 'close-up' }).nth(5).click();
    const sightline = page.getByRole('img', { name: 'The line of sight' });
    await sightline.waitFor();
    const first = await sightline.innerHTML();
    await page.locator('.picker').focus();
    for (let k = 0; k < 5; k++) await page.keyboard.press('ArrowUp');
    await page.waitForFunction((old) => document.querySelector('.close-up [aria-label="The line of sight"]')?.innerHTML !== old, first);
    await clean();
    await page.keyboard.press('Escape');
    await page.locator('dialog').waitFor({ state: 'detached' });
    expect(complaints).toEqual([]);
    await context.close();
  });
});
