import { copyFileSync, existsSync, readdirSync, readFileSync, statSync, writeFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { parseStudy } from '../src/infer/study.ts';
import { parseSweep } from '../src/sweep/parse-sweep.ts';
import { gyrelight, repository } from './cli/run.ts';
import { inFolder } from './support/tools.ts';

const pages = ['README.md', 'DEVELOPERS.md', 'models/README.md', 'src/README.md'];
const text = (page: string): string => readFileSync(repository(page), 'utf8');

describe('documentation', () => {
  it.each(pages)('%s links to files that exist', (page) => {
    const links = [...text(page).matchAll(/\]\(([^)#:]+)\)/g)].map(([, link]) => link);
    for (const link of links) expect(existsSync(join(dirname(repository(page)), link)), link).toBe(true);
  });

  it.each(pages)('%s names npm scripts that exist', (page) => {
    const { scripts } = JSON.parse(text('package.json')) as { scripts: Record<string, string> };
    const named = [...text(page).matchAll(/npm run ([a-z:]+)/g)].map(([, name]) => name);
    for (const name of named) expect(Object.keys(scripts), name).toContain(name);
  });

  it('src/README.md lists every folder', () => {
    const folders = readdirSync(repository('src')).filter((name) => statSync(repository(`src/${name}`)).isDirectory()).sort();
    const listed = [...text('src/README.md').matchAll(/^\| `(\w+)\/`/gm)].map(([, name]) => name).sort();
    expect(listed).toEqual(folders);
  });

  it('the README’s scene, study, sweep and dynamo are good ones', () => {
    const block = (kind: string): string => new RegExp(`\`\`\`yaml ${kind}\n([\\s\\S]*?)\`\`\``).exec(text('README.md'))?.[1] ?? '';
    inFolder((folder) => {
      writeFileSync(join(folder, 'scene.yaml'), block('scene'));
      const { status, stderr, stdout } = gyrelight(['check', 'scene.yaml'], folder);
      expect(stderr).toBe('');
      expect(status).toBe(0);
      expect(stdout).toContain('mine: largest');
    });
    inFolder((folder) => {
      writeFileSync(join(folder, 'dynamo.yaml'), block('dynamo'));
      copyFileSync(repository('scenes/lantern-wheel/rotation.csv'), join(folder, 'rotation.csv'));
      const { status, stderr, stdout } = gyrelight(['check', 'dynamo.yaml'], folder);
      expect(stderr).toBe('');
      expect(status).toBe(0);
      expect(stdout).toContain('even and odd parity');
    });
    expect(parseStudy(block('study'), 'README.md').hypotheses).toHaveLength(1);
    expect(parseSweep(block('sweep'), 'README.md').vary).toHaveLength(2);
  });

  it('every command the README names is one, and none is left out', () => {
    const { stdout } = gyrelight(['--help']);
    const commands = [...stdout.matchAll(/^ {2}(\w+) (?:\[options\] )?[<[]?/gm)].map(([, name]) => name).filter((name) => name !== 'help');
    const named = new Set([...text('README.md').matchAll(/^\| `gyrelight (\w+)/gm)].map(([, name]) => name));
    expect([...named].sort()).toEqual([...new Set(commands)].sort());
  });
});
