// Installs the packages where the lock file has changed since the last installation, and builds
// nothing else: run before start, test and app, so that a fresh clone needs no step by hand.
import { execFileSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('../..', import.meta.url));
const mark = `${root}node_modules/.installed-lock`;
const lock = createHash('sha256').update(readFileSync(`${root}package-lock.json`)).digest('hex');

if (!existsSync(mark) || readFileSync(mark, 'utf8') !== lock) {
  console.error('installing packages (package-lock.json is new)');
  const npm = process.platform === 'win32' ? 'npm.cmd' : 'npm';
  execFileSync(npm, ['ci', '--include=dev', '--no-audit', '--no-fund'], { cwd: root, stdio: ['ignore', 'inherit', 'inherit'] });
  writeFileSync(mark, lock);
}
