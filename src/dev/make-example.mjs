// Makes the example's invented observation again from its scene: Q and U of three bands.
import { copyFileSync, mkdirSync, mkdtempSync, rmSync } from 'node:fs';
import { execFileSync } from 'node:child_process';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('../..', import.meta.url));
const folder = join(root, 'scenes/lantern-wheel');
const made = mkdtempSync(join(tmpdir(), 'gyrelight-example-'));
const vite = `${root}node_modules/vite/bin/vite.js`;
execFileSync(process.execPath, [vite, 'build', '--config', 'src/dev/vite.node.config.ts'], { cwd: root, stdio: 'inherit' });
execFileSync(process.execPath, [join(root, 'dist/gyrelight.js'), 'map', 'scenes/lantern-wheel/sky.scene.yaml', '--out', made], { cwd: root, stdio: 'inherit' });
mkdirSync(join(folder, 'observation'), { recursive: true });
for (const band of ['L20', 'S13', 'C6']) {
  for (const stokes of ['Q', 'U']) copyFileSync(join(made, `${stokes}-${band}.fits`), join(folder, 'observation', `${stokes}-${band}.fits`));
}
rmSync(made, { recursive: true });
