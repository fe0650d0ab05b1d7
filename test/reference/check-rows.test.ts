import { readdirSync, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { expect, test } from 'vitest';
import { checkIds, checkRow } from './check-rows.ts';

const tests = fileURLToPath(new URL('..', import.meta.url));

test('every row of sections 5, 6 and 10 of the check values is asked for by a test', () => {
  const sources = readdirSync(tests, { recursive: true, encoding: 'utf8' })
    .filter((name) => name.endsWith('.ts') && !name.endsWith('check-rows.ts') && !name.endsWith('check-rows.test.ts'))
    .map((name) => readFileSync(`${tests}/${name}`, 'utf8'));
  const unasked = checkIds.filter((id) => !sources.some((source) => source.includes(`'${id}'`)));
  expect(unasked).toEqual([]);
});

test('no row is lost: as many as the check values have in each section, all numbers', () => {
  const rowsOf = (section: string): number => checkIds.filter((id) => id.startsWith(`${section}.`)).length;
  expect([rowsOf('5'), rowsOf('6'), rowsOf('10')]).toEqual([45, 28, 4]);
  for (const id of checkIds) for (const value of checkRow(id)) expect(Number.isFinite(value), id).toBe(true);
});
