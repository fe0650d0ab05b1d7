import { createServer, type Server } from 'node:http';
import { existsSync, readFileSync } from 'node:fs';
import { extname, join } from 'node:path';
import type { AddressInfo } from 'node:net';
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
}

const types: Readonly<Record<string, string>> = { '.js': 'text/javascript', '.html': 'text/html' };
const isolation = { 'Cross-Origin-Opener-Policy': 'same-origin', 'Cross-Origin-Embedder-Policy': 'require-corp' };

/** Serves such a folder on this machine only, with or without the headers that let a page share memory. */
export async function servePage(folder: string, isIsolated: boolean): Promise<{ readonly address: string; readonly server: Server }> {
  const server = createServer((request, response) => {
    const path = new URL(request.url ?? '/', 'http://127.0.0.1').pathname;
    const headers = isIsolated ? isolation : {};
    if (path === '/') {
      response.writeHead(200, { 'Content-Type': 'text/html', ...headers }).end('<!doctype html><script type="module" src="/page.js"></script>');
      return;
    }
    const file = join(folder, path);
    if (existsSync(file)) response.writeHead(200, { 'Content-Type': types[extname(path)] ?? 'application/octet-stream', ...headers }).end(readFileSync(file));
    else response.writeHead(404).end();
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  return { address: `http://127.0.0.1:${(server.address() as AddressInfo).port}/`, server };
}
