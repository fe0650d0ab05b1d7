import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vite';

const at = (path: string): string => fileURLToPath(new URL(path, import.meta.url));

/** The page: static files that work from any server, or from `gyrelight app`. */
export default defineConfig({
  root: at('../app'),
  base: './',
  publicDir: false,
  logLevel: 'warn',
  oxc: { jsx: { runtime: 'automatic', importSource: 'preact' } },
  worker: { format: 'es' },
  build: { target: 'es2022', outDir: at('../../dist/page'), emptyOutDir: true, assetsInlineLimit: 0, chunkSizeWarningLimit: 1200 },
});
