import { fileURLToPath } from 'node:url';
import { build } from 'vite';

/** Builds the command line before tests run, so that they run what users run. */
export default async function buildOnce(): Promise<void> {
  await build({ configFile: fileURLToPath(new URL('./vite.node.config.ts', import.meta.url)) });
}
