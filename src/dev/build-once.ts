import { fileURLToPath } from 'node:url';
import { build } from 'vite';

/** Builds the command line and the page before tests run, so that they run what users run. */
export default async function buildOnce(): Promise<void> {
  for (const config of ['./vite.node.config.ts', './vite.page.config.ts']) await build({ configFile: fileURLToPath(new URL(config, import.meta.url)) });
}
