import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { InputError } from '../../src/units/input-error.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { sceneJsonSchema } from '../../src/scene/json-schema.ts';
import { fullScene } from './support.ts';

const text = fullScene.join('\n');

/** Parses; returns whether it was refused. Anything but an InputError with words fails the test. */
function refused(mutant: string): boolean {
  try {
    const scene = parseScene(mutant, 's.yaml', []);
    expect(JSON.stringify(scene)).not.toContain('null');
    return false;
  } catch (error) {
    if (!(error instanceof InputError)) throw new Error(`${String(error)} came out of:\n${mutant}`, { cause: error });
    expect(error.reason).not.toMatch(/\[object|Invalid input|undefined/);
    expect(error.message.length).toBeLessThan(5000);
    return true;
  }
}

const junk = fc.oneof(
  fc.constantFrom(
    '', '.nan', '.inf', '-1', '0', '1e999', 'null', '~', '[]', '{}', '[[1]]', '{a: 1}', '"', "'", '&a', '*a', '!!js/function x', '<<: *a', '? x', '|', '>', '-',
    ': ', '#', '%YAML 1.1', '---', '...', 'constructor', '__proto__', 'toString', 'NaN kpc', '1e308 Mpc', '2 kpc^999', '\u0000', '\ud800', '\ufeff', 'true', 'formula',
    '0x1f', '1_000', '2001-01-01', '{model: formula}', '[1, 2, 3]', '\t', '\r\n',
  ),
  fc.string({ maxLength: 12 }),
  fc.string({ unit: 'binary', maxLength: 6 }),
);

describe('random damage to a right scene never does worse than an InputError', () => {
  test('a slice of the text replaced', () => {
    let count = 0;
    fc.assert(
      fc.property(fc.nat(text.length), fc.nat(30), junk, (start, length, piece) => {
        if (refused(text.slice(0, start) + piece + text.slice(start + length))) count++;
      }),
      { seed: 5, numRuns: 250 },
    );
    expect(count).toBeGreaterThan(100);
  });

  test('a value replaced', () => {
    const values = [...text.matchAll(/: ([^,:{}[\]\n]+)/g)];
    let count = 0;
    fc.assert(
      fc.property(fc.nat(values.length - 1), junk, (which, piece) => {
        const { index, 1: old } = values[which];
        if (refused(`${text.slice(0, index)}: ${piece}${text.slice(index + 2 + old.length)}`)) count++;
      }),
      { seed: 6, numRuns: 250 },
    );
    expect(count).toBeGreaterThan(100);
  });

  test('lines dropped, doubled and exchanged', () => {
    fc.assert(
      fc.property(fc.nat(fullScene.length - 1), fc.nat(fullScene.length - 1), fc.nat(2), (a, b, kind) => {
        const lines = [...fullScene];
        if (kind === 0) lines.splice(a, 1);
        else if (kind === 1) lines.splice(a, 0, lines[b]);
        else [lines[a], lines[b]] = [lines[b], lines[a]];
        refused(lines.join('\n'));
      }),
      { seed: 7, numRuns: 120 },
    );
  });

  test('junk in --set', () => {
    fc.assert(
      fc.property(fc.constantFrom('field.halo.core', 'observation', 'field', 'field.halo', 'a.b', '__proto__', 'title', 'observation.bands.L'), junk, (path, value) => {
        try {
          parseScene(text, 's.yaml', [{ path, value, flag: '--set' }]);
        } catch (error) {
          if (!(error instanceof InputError)) throw new Error(`${String(error)} came out of ${path}=${value}`, { cause: error });
        }
      }),
      { seed: 8, numRuns: 120 },
    );
  });
});

test('the undamaged scene is not refused', () => expect(refused(text)).toBe(false));

test('the JSON Schema names the sections, the models and the units', () => {
  const schema = sceneJsonSchema() as {
    required: string[];
    properties: Record<string, { items?: { anyOf: { properties: Record<string, { const?: string; description?: string }> }[] } }>;
  };
  expect(schema.required).toEqual(['gyrelight', 'galaxy', 'cosmicRays', 'observation']);
  const fields = schema.properties.field.items?.anyOf ?? [];
  const halo = fields.find(({ properties }) => properties.model.const === 'quadrupole-halo');
  expect(halo?.properties.strength.description).toMatch(/; a magnetic field, -1000 to 1000 uG$/);
  expect(fields.at(-1)?.properties.model.const).toBe('formula');
  // It is JSON: nothing is lost in writing it.
  expect(JSON.parse(JSON.stringify(schema))).toEqual(schema);
});
