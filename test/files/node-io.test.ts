import { mkdirSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, test } from 'vitest';
import { readBytes, readText, writeWhole } from '../../src/files/node-io.ts';
import { InputError } from '../../src/units/input-error.ts';
import { inFolder } from '../support/tools.ts';

test('what is written is read, folders are made, nothing is left beside it', () => {
  inFolder((folder) => {
    const path = join(folder, 'new/deep/file.txt');
    writeWhole(path, 'µ\n');
    expect(readText(path)).toBe('µ\n');
    writeWhole(path, Uint8Array.of(1, 2, 255));
    expect(readBytes(path)).toEqual(Uint8Array.of(1, 2, 255));
    expect(readdirSync(join(folder, 'new/deep'))).toEqual(['file.txt']);
  });
});

test('errors say what is wrong with which file', () => {
  inFolder((folder) => {
    writeFileSync(join(folder, 'galaxy.scene.yaml'), Uint8Array.of(0xff, 0xfe));
    expect(() => readBytes(join(folder, 'galaxy.sceen.yaml'))).toThrow(InputError);
    expect(() => readBytes(join(folder, 'galaxy.sceen.yaml'))).toThrow(/galaxy\.sceen\.yaml: there is no such file \(did you mean "galaxy\.scene\.yaml"\?\)$/);
    expect(() => readBytes(join(folder, 'no/such/folder'))).toThrow(/there is no such file$/);
    expect(() => readBytes(folder)).toThrow('this is a folder, not a file');
    expect(() => readBytes(join(folder, 'galaxy.scene.yaml/x'))).toThrow('a part of its path is a file');
    expect(() => readText(join(folder, 'galaxy.scene.yaml'))).toThrow('the file is no UTF-8 text');
  });
});

test('a write that fails leaves what was there, and nothing beside it', () => {
  inFolder((folder) => {
    const path = join(folder, 'taken');
    mkdirSync(path);
    expect(() => writeWhole(path, 'x')).toThrow(`${path}: cannot write the file: a folder has that name`);
    expect(readdirSync(folder)).toEqual(['taken']);
    writeFileSync(join(folder, 'file'), 'old');
    expect(() => writeWhole(join(folder, 'file/x'), 'x')).toThrow('cannot write the file: a part of its path is a file');
    expect(readFileSync(join(folder, 'file'), 'utf8')).toBe('old');
    expect(() => writeWhole(join(folder, 'n'.repeat(300)), 'x')).toThrow('cannot write the file: its name is too long');
    expect(readdirSync(folder).sort()).toEqual(['file', 'taken']);
  });
});
