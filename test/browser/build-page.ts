import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { build } from 'vite';

/** Bundles a page's script, and the workers it starts, into a folder. */
export async function buildPage(entry: string, folder: string): Promise<void> {
  await build({
    configFile: false,
    root: process.cwd(),
    publicDir: false,
    logLevel: 'error',
    worker: { format: 'es' },
    build: { outDir: folder, emptyOutDir: false, target: 'es2022', minify: false, rollupOptions: { input: { page: entry }, output: { entryFileNames: '[name].js' } } },
  });
  writeFileSync(join(folder, 'index.html'), '<!doctype html><script type="module" src="/page.js"></script>');
}
