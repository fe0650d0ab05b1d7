import { defineConfig } from 'vitest/config';
import short from './vitest.config.ts';

/** What runs for long: calibration over many seeds, big fuzzing. */
export default defineConfig({
  ...short,
  test: { ...short.test, include: ['test/**/*.long.test.ts'], exclude: ['node_modules/**'], testTimeout: 3_600_000 },
});
