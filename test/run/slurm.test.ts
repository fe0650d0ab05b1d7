import { spawnSync } from 'node:child_process';
import { mkdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { ArrayFiles, arrayScript } from '../../src/run/array-files.ts';
import { serveItems } from '../../src/run/serve.ts';
import { hasEnded, parseQueue, splitFlags } from '../../src/run/slurm.ts';
import { InputError } from '../../src/units/input-error.ts';
import { inFolder } from '../support/tools.ts';

describe('what Slurm is told and says', () => {
  it('parts flags as a shell does', () => {
    const text = `--partition=long --time 2:00:00 --comment="two words" --x='a "b"'`;
    const shell = spawnSync('sh', ['-c', `for word in ${text}; do echo "$word"; done`], { encoding: 'utf8' }).stdout.trimEnd().split('\n');
    expect(splitFlags(text)).toEqual(shell);
    expect(splitFlags('  ')).toEqual([]);
    expect(() => splitFlags('--a "b')).toThrow(InputError);
  });

  it('reads the queue: states, reasons that hold a |, and what is no array', () => {
    const tasks = parseQueue('gyrelight-a-1|0|12|RUNNING|None\ngyrelight-a-1|3|12|PENDING|launch failed requeued held\nother|N/A|13|RUNNING|None\n');
    expect(tasks.map(({ index, state }) => [index, state])).toEqual([[0, 'RUNNING'], [3, 'PENDING']]);
    expect(tasks.map(hasEnded)).toEqual([false, true]);
    expect(['NODE_FAIL', 'CANCELLED', 'COMPLETED'].every((state) => hasEnded({ state, reason: '' }))).toBe(true);
    expect(hasEnded({ state: 'COMPLETING', reason: 'None' })).toBe(false);
  });

  it('a script hands each task its key, whatever the folder is called', () => {
    inFolder((folder) => {
      const odd = join(folder, `it's "odd" %a $HOME`);
      mkdirSync(odd);
      writeFileSync(join(odd, 'list'), 'first\nsecond\n');
      writeFileSync(join(odd, 'program.mjs'), 'console.log(process.argv.slice(2).join("|"))');
      writeFileSync(join(odd, 's.sh'), arrayScript(odd, join(odd, 'list'), { node: process.execPath, script: join(odd, 'program.mjs') }));
      const said = spawnSync('sh', [join(odd, 's.sh')], { env: { ...process.env, SLURM_ARRAY_TASK_ID: '1' }, encoding: 'utf8' });
      expect(said.stdout).toBe(`task|${odd}|second\n`);
      const files = new ArrayFiles(odd, 'x');
      const record = files.addArray(['k1', 'k2'], { node: 'node', script: 'p' });
      files.keepJob(record, '77');
      expect(files.records()).toEqual([{ name: 'gyrelight-x-1', number: 1, keys: ['k1', 'k2'], jobId: '77' }]);
      expect(files.parameters(record, ['--x'])).toContain('--array=0-1');
      // Slurm takes %a for the task's number; a % of the folder must not be taken so.
      expect(files.parameters(record, []).find((one) => one.startsWith('--output='))).toContain('%%a $HOME/log/1-%a.txt');
    });
  });

  it('workers get each item once; the first error stops the handing out', async () => {
    const seen: number[] = [];
    const worker = { work: (item: number): Promise<void> => (item === 5 ? Promise.reject(new Error('five')) : Promise.resolve(void seen.push(item))) };
    await serveItems([worker, worker, worker], [0, 1, 2, 3, 4]);
    expect([...seen].sort()).toEqual([0, 1, 2, 3, 4]);
    seen.length = 0;
    await expect(serveItems([worker, worker], Array.from({ length: 1000 }, (_, k) => k))).rejects.toThrow('five');
    expect(seen.length).toBeLessThan(20);
  });
});
