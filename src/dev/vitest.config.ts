import { defineConfig } from 'vitest/config';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('../..', import.meta.url));

export default defineConfig({
  root,
  test: {
    include: ['test/**/*.test.ts'],
    exclude: ['test/**/*.long.test.ts', 'node_modules/**'],
    globalSetup: fileURLToPath(new URL('./build-once.ts', import.meta.url)),
    testTimeout: 120_000,
    hookTimeout: 120_000,
    maxWorkers: 2,
    reporters: ['default', fileURLToPath(new URL('./closing-line.ts', import.meta.url))],
  },
});
