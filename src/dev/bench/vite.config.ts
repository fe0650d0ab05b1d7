import { builtinModules } from 'node:module';
import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vite';

const root = fileURLToPath(new URL('../../..', import.meta.url));
const entry = (path: string): string => fileURLToPath(new URL(`../../${path}`, import.meta.url));

/** The benchmark with a command line and a worker thread of its own, in out/: no part of what is shipped. */
export default defineConfig({
  root,
  publicDir: false,
  logLevel: 'warn',
  ssr: { noExternal: true, external: [...builtinModules] },
  build: {
    ssr: true,
    target: 'node20',
    outDir: 'out/bench',
    emptyOutDir: true,
    minify: false,
    rollupOptions: {
      input: { bench: entry('dev/bench/bench.ts'), gyrelight: entry('cli/main.ts'), 'ray-worker': entry('run/ray-worker.ts') },
      // All beside each other: the pool looks for its worker next to itself.
      output: { entryFileNames: '[name].js', chunkFileNames: '[name]-[hash].js' },
    },
  },
});
