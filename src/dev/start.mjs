// The main job on the example: builds the program and ranks the hypotheses of the example study.
import { execFileSync, spawnSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('../..', import.meta.url));
const vite = `${root}node_modules/vite/bin/vite.js`;
execFileSync(process.execPath, [vite, 'build', '--config', 'src/dev/vite.node.config.ts'], { cwd: root, stdio: 'inherit' });

const study = 'scenes/lantern-wheel/lantern-wheel.study.yaml';
const out = 'out/lantern-wheel';
const given = process.argv.slice(2);
console.log(`gyrelight rank ${study} --out ${out}`);
const run = spawnSync(process.execPath, ['dist/gyrelight.js', 'rank', study, '--out', out, ...given], { cwd: root, stdio: 'inherit' });
process.exit(run.status ?? 1);
