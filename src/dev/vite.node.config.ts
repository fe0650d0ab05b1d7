import { fileURLToPath } from 'node:url';
import { builtinModules } from 'node:module';
import { defineConfig } from 'vite';

const root = fileURLToPath(new URL('../..', import.meta.url));
const entry = (path: string): string => fileURLToPath(new URL(`../${path}`, import.meta.url));

/** The command line and its worker thread, bundled for Node with all they need. */
export default defineConfig({
  root,
  publicDir: false,
  logLevel: 'warn',
  ssr: { noExternal: true, external: [...builtinModules] },
  build: {
    ssr: true,
    target: 'node20',
    outDir: 'dist',
    emptyOutDir: false,
    minify: false,
    rollupOptions: {
      input: { gyrelight: entry('cli/main.ts'), 'ray-worker': entry('run/ray-worker.ts'), 'sweep-worker': entry('run/sweep-worker.ts') },
      output: { entryFileNames: '[name].js', chunkFileNames: 'parts/[name]-[hash].js', banner: '#!/usr/bin/env node' },
    },
  },
});
