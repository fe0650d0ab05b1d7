import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { chromium, type Browser, type Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { servePage, type PageServer } from '../../src/cli/page-server.ts';
import { localBackend } from '../../src/ray/job.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import type { Pools } from './pool-page.ts';
import { buildPage } from './build-page.ts';

const executablePath = '/usr/bin/chromium';
const sceneText = readFileSync('test/reference/a-spiral-quadrupole.yaml', 'utf8');

function jobOf(side: number, stepKpc: number) {
  const offset = (k: number): number => (k - (side - 1) / 2) * stepKpc;
  return {
    sceneText,
    hertz: [0.35e9, 1.4e9, 4.8e9],
    northKpc: Array.from({ length: side * side }, (_, k) => offset(Math.floor(k / side))),
    eastKpc: Array.from({ length: side * side }, (_, k) => -offset(k % side)),
  };
}

const short = jobOf(25, 1.1);
const long = jobOf(260, 0.1);

declare const pools: Pools;

describe.skipIf(!existsSync(executablePath))('workers of the browser (skipped where there is no /usr/bin/chromium: apt-get install chromium)', () => {
  const folder = mkdtempSync(join(tmpdir(), 'gyrelight-page-'));
  let browser: Browser;
  const servers: PageServer[] = [];

  beforeAll(async () => {
    await buildPage('test/browser/pool-page.ts', folder);
    for (const isIsolated of [false, true]) servers.push(await servePage(folder, 0, isIsolated));
    browser = await chromium.launch({ executablePath, args: ['--no-sandbox'] });
  }, 120_000);

  afterAll(async () => {
    await browser?.close();
    for (const server of servers) await server.close();
    rmSync(folder, { recursive: true, force: true });
  });

  async function onPage<T>(isIsolated: boolean, work: (page: Page) => Promise<T>): Promise<T> {
    const page = await browser.newPage();
    try {
      await page.goto(servers[isIsolated ? 1 : 0].url);
      await page.waitForFunction(() => 'pools' in globalThis);
      return await work(page);
    } finally {
      await page.close();
    }
  }

  test('the result is that of Node to the last bit, for 1 and 3 workers, with and without shared memory', async () => {
    const scene = parseScene(sceneText, 'test.yaml');
    const spectrum = short.hertz.map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz }));
    const node = await localBackend()({ scene, spectrum, bundle: { northKpc: Float64Array.from(short.northKpc), eastKpc: Float64Array.from(short.eastKpc) } });
    for (const isIsolated of [false, true]) {
      await onPage(isIsolated, async (page) => {
        expect(await page.evaluate(() => pools.isIsolated())).toBe(isIsolated);
        for (const workers of [1, 3]) {
          const seen = await page.evaluate(([job, count]) => pools.follow(job, count), [short, workers] as const);
          for (const name of ['I', 'Q', 'U', 'heightQ', 'heightU', 'emittedP', 'faradayDepth', 'error'] as const) {
            expect(seen[name].some((value) => value !== 0), name).toBe(true);
            expect(seen[name], `${name}, ${workers} workers`).toEqual(Array.from(node[name]));
          }
        }
        // The browser ends a thread a moment after it is told to.
      await page.waitForFunction(async () => (await pools.alive()) === 0, undefined, { timeout: 10_000 });
      });
    }
  }, 120_000);

  test('a job that is stopped ends soon, and no worker is left behind', async () => {
    await onPage(false, async (page) => {
      const { name, tookMs } = await page.evaluate((job) => pools.cancel(job, 100), long);
      expect(name).toBe('AbortError');
      // A part of a tile is some 50 ms of work on a quiet core; the rest is for a busy machine.
      expect(tookMs).toBeLessThan(1000);
      // The browser ends a thread a moment after it is told to.
      await page.waitForFunction(async () => (await pools.alive()) === 0, undefined, { timeout: 10_000 });
    });
  }, 120_000);

  test('a worker that dies ends its job with words, and another takes its place', async () => {
    await onPage(false, async (page) => {
      const { message, next } = await page.evaluate(([first, second]) => pools.kill(first, second), [long, short] as const);
      expect(message).toBe('a worker ended unexpectedly');
      expect(next.Q).toEqual((await page.evaluate((job) => pools.follow(job, 1), short)).Q);
      // The browser ends a thread a moment after it is told to.
      await page.waitForFunction(async () => (await pools.alive()) === 0, undefined, { timeout: 10_000 });
    });
  }, 120_000);
});
