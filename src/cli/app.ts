import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import type { Command } from 'commander';
import { InputError } from '../units/input-error.ts';
import { servePage } from './page-server.ts';

/** `gyrelight app`: the page, for this machine only. */
export function addApp(program: Command): void {
  program
    .command('app')
    .description('serve the page on this machine only (127.0.0.1), until Ctrl-C')
    .option('--port <number>', 'port to listen on; 0: any that is free', '4817')
    .action(async ({ port }: { readonly port: string }) => {
      const number = Number(port);
      if (!/^\d+$/.test(port) || number > 65535) throw new InputError('a port is a whole number from 0 to 65535', { flag: `--port ${port}` });
      const folder = fileURLToPath(new URL('./page', import.meta.url));
      if (!existsSync(`${folder}/index.html`)) throw new Error(`the page is not built (${folder}); run npm run app, or npm run build`);
      const server = await servePage(folder, number);
      process.stdout.write(`Gyrelight's page: ${server.url}   (Ctrl-C ends it)\n`);
      await new Promise<void>((resolve) => {
        process.once('SIGINT', resolve);
        process.once('SIGTERM', resolve);
      });
      await server.close();
    });
}
