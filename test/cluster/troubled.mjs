// Stands in for the built program in the cluster's test: tasks take longer, and the one that begins with
// scene 0 fails as often as FAILURES says. All else is the program itself.
import { appendFileSync, existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { setTimeout as pause } from 'node:timers/promises';

const [, , command, folder, key] = process.argv;
if (command === 'task') {
  const { from } = JSON.parse(readFileSync(join(folder, 'tasks', `${key}.json`), 'utf8'));
  await pause(Number(process.env.SLOW_MS ?? '0'));
  const tries = join(folder, 'tries');
  const before = existsSync(tries) ? readFileSync(tries, 'utf8').length : 0;
  if (from === 0 && before < Number(process.env.FAILURES ?? '0')) {
    appendFileSync(tries, 'x');
    console.error('broken on purpose');
    process.exit(3);
  }
}
await import('../../dist/gyrelight.js');
