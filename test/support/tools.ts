import { execFileSync, spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { TestContext } from 'vitest';

/** Debian's Python: another one on the path may lack the modules. */
const PYTHON = '/usr/bin/python3';

/** Debian packages that bring the tools tests compare with. */
const PACKAGES: Readonly<Record<string, string>> = {
  astropy: 'python3-astropy',
  numpy: 'python3-numpy',
  scipy: 'python3-scipy',
  fitsverify: 'fitsverify',
};

/** Has Debian's Python all of these modules? */
export function hasPython(...modules: readonly string[]): boolean {
  const code = 'import sys, importlib.util as u; sys.exit(any(u.find_spec(m) is None for m in sys.argv[1:]))';
  return spawnSync(PYTHON, ['-c', code, ...modules]).status === 0;
}

/** Is a command on the path? */
export function hasCommand(name: string): boolean {
  return spawnSync('which', [name]).status === 0;
}

/** Skip the test of this context, with reason and remedy, where a Python module is missing. */
export function needPython(context: TestContext, ...modules: readonly string[]): void {
  if (hasPython(...modules)) return;
  context.skip(`needs ${PYTHON} with ${modules.join(', ')}: apt-get install ${packages(modules)}`);
}

/** Skip the test of this context, with reason and remedy, where a command is missing. */
export function needCommand(context: TestContext, name: string): void {
  if (hasCommand(name)) return;
  context.skip(`needs ${name}: apt-get install ${packages([name])}`);
}

function packages(names: readonly string[]): string {
  return names.map((name) => PACKAGES[name] ?? name).join(' ');
}

/** Run a Python program in Debian's Python and return what it prints. Throws with its traceback. */
export function runPython(code: string, args: readonly string[] = [], input = ''): string {
  return execFileSync(PYTHON, ['-c', code, ...args], { input, encoding: 'utf8', maxBuffer: 1 << 28 });
}

/** Run a Python program that prints one JSON value. */
export function pythonJson(code: string, args: readonly string[] = [], input = ''): unknown {
  return JSON.parse(runPython(code, args, input)) as unknown;
}

/** Hand a new folder to `work` and remove it afterwards. */
export function inFolder<Result>(work: (folder: string) => Result): Result {
  const folder = mkdtempSync(join(tmpdir(), 'gyrelight-'));
  try {
    return work(folder);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

/** What fitsverify prints about a file; its last line counts warnings and errors. */
export function fitsVerdict(bytes: Uint8Array): string {
  return inFolder((folder) => {
    const path = join(folder, 'file.fits');
    writeFileSync(path, bytes);
    return spawnSync('fitsverify', [path], { encoding: 'utf8' }).stdout;
  });
}
