import { describe, expect, test } from 'vitest';
import { z } from 'zod';
import { InputError } from '../../src/units/input-error.ts';
import { keys, listOf, oneOf, plainNumber, quantity, words } from '../../src/units/schema.ts';
import { checkVersion, checkYaml, placeAt, plainValue, readYaml } from '../../src/units/yaml-input.ts';

const schema = keys(
  {
    title: words('a title'),
    size: quantity({ unit: 'kpc', min: 0, max: 50 }, 'kpc', 'how large'),
    count: plainNumber({ unit: '', min: 1, max: 9, whole: true }).optional(),
    colour: oneOf(['red', 'green'], 'colour').optional(),
    parts: listOf(keys({ name: words('a name'), angle: quantity({ unit: 'deg', min: 0, max: 180 }, 'rad') }), 'parts', 1, 3).optional(),
  },
  ['smell'],
);

function check(text: string): unknown {
  return checkYaml(readYaml(text, 'box.yaml'), schema);
}

function errorOf(run: () => unknown): InputError {
  try {
    run();
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error('nothing was wrong');
}

test('a right file gives its values in internal units', () => {
  const text = 'title: a box\nsize: 2000 pc\ncount: 3\ncolour: red\nparts:\n  - {name: lid, angle: 90 deg}\n';
  expect(check(text)).toEqual({ title: 'a box', size: 2, count: 3, colour: 'red', parts: [{ name: 'lid', angle: Math.PI / 2 }] });
});

describe('what is wrong is said with its place', () => {
  test.each([
    ['title: t\nsize: 60 kpc', 'box.yaml:2:7: size: "60 kpc" is outside 0 to 50 kpc'],
    ['title: t\nsize: 2', 'box.yaml:2:7: size: 2 has no unit: a length is wanted, such as "2 kpc"'],
    ['title: t\nsize: [1]', 'box.yaml:2:7: size: a list of 1 is given where a length is wanted, such as "2 kpc" (0 to 50 kpc)'],
    ['title: t\nsize:', 'box.yaml:2:6: size: nothing is given where a length is wanted, such as "2 kpc" (0 to 50 kpc)'],
    ['title: t', 'box.yaml:1:1: size is missing: a length is wanted, such as "2 kpc" (0 to 50 kpc)'],
    ['title: t\nsise: 2 kpc', 'box.yaml:2:1: unknown key "sise" (did you mean "size"?); allowed are title, size, count, colour, parts'],
    ['title: t\nsize: 2 kpc\nsmell: sweet', 'box.yaml:3:1: "smell" is not available in this version'],
    ['title: t\nsize: 2 kpc\n{a, b: c}: 2', 'box.yaml:3:1: a key must be a plain word'],
    ['title: t\nsize: 2 kpc\n3: 2', 'box.yaml:3:1: a key must be a plain word'],
    ['{title: t, size: 2 kpc, of any kind}', 'box.yaml:1:25: unknown key "of any kind": a text with a comma inside { } needs quotes'],
    ['title: t\nsize: 2 kpc\ncount: 2.5', 'box.yaml:3:8: count: 2.5 is not allowed: a whole number, 1 to 9'],
    ['title: t\nsize: 2 kpc\ncount: .nan', 'box.yaml:3:8: count: NaN is given where a plain number is wanted (a whole number, 1 to 9)'],
    ['title: t\nsize: 2 kpc\ncount: "3"', 'box.yaml:3:8: count: "3" is given where a plain number is wanted (a whole number, 1 to 9)'],
    ['title: t\nsize: 2 kpc\ncolour: gren', 'box.yaml:3:9: colour: "gren" is not allowed: colour is one of red, green (did you mean "green"?)'],
    ['title: " "\nsize: 2 kpc', 'box.yaml:1:8: title is empty: a title is wanted'],
    ['title: t\nsize: 2 kpc\nparts: []', 'box.yaml:3:8: parts: a list of 0 is given: 1 to 3 parts are allowed'],
    ['title: t\nsize: 2 kpc\nparts: 5', 'box.yaml:3:8: parts: 5 is given where a list of parts is wanted'],
    ['title: t\nsize: 2 kpc\nparts:\n  - {name: lid, angle: 200 deg}', 'box.yaml:4:24: parts.lid.angle: "200 deg" is outside 0 to 180 deg'],
    ['title: t\nsize: 2 kpc\nparts:\n  - name: lid', 'box.yaml:4:5: parts.lid.angle is missing: an angle is wanted, such as "2 deg" (0 to 180 deg)'],
    ['title: t\nsize: 2 kpc\nparts:\n  - 7', 'box.yaml:4:5: parts, item 1: 7 is given where a group of the keys name, angle is wanted'],
    ['title: t\nsize: 1 kpc\nsize: 2 kpc', 'box.yaml:3:1: the key "size" is given twice'],
    ['title: t\n\tsize: 1 kpc', 'box.yaml:2:1: not valid YAML: Tabs are not allowed as indentation'],
    ['title: t\nsize: !!foo 3', 'box.yaml:2:7: not valid YAML: Unresolved tag: tag:yaml.org,2002:foo'],
    ['title: t\nsize: *nothing', 'box.yaml: not valid YAML: Unresolved alias (the anchor must be set before the alias): nothing'],
    ['- 1', 'box.yaml:1:1: a list of 1 is given where a group of the keys title, size, count, colour, parts is wanted'],
    ['', 'box.yaml: nothing is given where a group of the keys title, size, count, colour, parts is wanted'],
  ])('%j', (text, message) => expect(errorOf(() => check(text)).message).toBe(message));

  test('several documents', () => {
    expect(errorOf(() => check('title: t\n---\ntitle: u')).message).toBe('box.yaml: the file holds several YAML documents; one is allowed');
  });
});

describe('hostile texts', () => {
  test('an alias bomb', () => {
    const lines = ['a0: &a0 [x, x, x, x, x, x, x, x, x]'];
    for (let k = 1; k < 12; k++) lines.push(`a${k}: &a${k} [${Array(9).fill(`*a${k - 1}`).join(', ')}]`);
    expect(errorOf(() => check(lines.join('\n'))).message).toMatch(/^box\.yaml: not valid YAML: Excessive alias count/);
  });

  test('an alias that holds itself', () => {
    expect(errorOf(() => check('title: &t [*t]')).message).toBe('box.yaml: values are nested more than 40 deep, or an alias holds itself');
  });

  test.each([['[', 1000], ['[', 90000], ['- ', 20000], ['? ', 20000], ['{a: ', 20000]])('%j nested %d deep', (opening, depth) => {
    expect(errorOf(() => check(opening.repeat(depth))).message).toBe('box.yaml: values are nested more than 64 deep');
  });

  test('a text too long', () => {
    expect(errorOf(() => check(`title: ${'x'.repeat(200_000)}`)).message).toBe('box.yaml: the text has 200007 characters; at most 200000 are allowed');
  });

  test('__proto__ is an unknown key like any other', () => {
    expect(errorOf(() => check('title: t\nsize: 1 kpc\n__proto__: {title: u}')).message).toMatch(/^box\.yaml:3:1: unknown key "__proto__"/);
  });
});

test('aliases share a value, and errors in it are placed where it is used', () => {
  const anchored = 'title: t\nsize: &s 3 kpc\nparts:\n  - {name: a, angle: *s}';
  expect(errorOf(() => check(anchored)).message).toBe('box.yaml:4:22: parts.a.angle: "3 kpc" is a length: an angle is wanted, such as "2 deg"');
});

test('places of values, of keys, and of what is missing', () => {
  const input = readYaml('a:\n  b: [1, 22]\n', 'f.yaml');
  expect(placeAt(input, ['a', 'b', 1])).toEqual({ file: 'f.yaml', line: 2, column: 10 });
  expect(placeAt(input, ['a'], 'b')).toEqual({ file: 'f.yaml', line: 2, column: 3 });
  expect(placeAt(input, ['a', 'zz'])).toEqual({ file: 'f.yaml', line: 2, column: 3 });
  input.flags.set((input.document.get('a', true) as { items: { value: unknown }[] }).items[0].value, '--set a.b=1');
  expect(placeAt(input, ['a', 'b', 1])).toEqual({ flag: '--set a.b=1' });
  expect(plainValue(input)).toEqual({ a: { b: [1, 22] } });
});

test.each([
  ['gyrelight: 1', undefined],
  ['gyrelight: 2', 'f.yaml:1:12: gyrelight: 2 is a newer file format than this version can read (it reads 1)'],
  ['gyrelight: old', 'f.yaml:1:12: gyrelight: "old" is no version of the file format (it reads 1)'],
  ['title: t', 'f.yaml:1:1: "gyrelight: 1" is missing'],
  ['gyrelight-study: 1', 'f.yaml:1:1: "gyrelight: 1" is missing; this file says "gyrelight-study", so it is of another kind'],
  ['- 1', 'f.yaml:1:1: a list of 1 is given where keys are wanted, first "gyrelight: 1"'],
])('version of %j', (text, message) => {
  const run = (): void => checkVersion(readYaml(text, 'f.yaml'), 'gyrelight', 1);
  if (message === undefined) expect(run).not.toThrow();
  else expect(errorOf(run).message).toBe(message);
});

test('schemas describe themselves to editors', () => {
  const json = z.toJSONSchema(schema, { io: 'input' });
  expect(json.properties?.size).toEqual({ type: 'string', description: 'how large; a length, 0 to 50 kpc' });
  expect(json.properties?.count).toMatchObject({ type: 'number', minimum: 1, maximum: 9 });
  expect(json.required).toEqual(['title', 'size']);
});
