import { createReadStream, statSync } from 'node:fs';
import { createServer, type Server } from 'node:http';
import { extname, join, normalize, sep } from 'node:path';
import { InputError } from '../units/input-error.ts';

const types: Readonly<Record<string, string>> = {
  '.html': 'text/html; charset=utf-8',
  '.js': 'text/javascript; charset=utf-8',
  '.css': 'text/css; charset=utf-8',
  '.json': 'application/json',
  '.svg': 'image/svg+xml',
  '.ttf': 'font/ttf',
  '.wasm': 'application/wasm',
};

export interface PageServer {
  readonly url: string;
  close(): Promise<void>;
}

/**
 * Serves a folder of static files on this machine only (127.0.0.1). `isolated` adds the headers that
 * let workers share memory (COOP and COEP). Throws InputError where the port is taken.
 */
export function servePage(folder: string, port: number, isolated = true): Promise<PageServer> {
  const headers: Record<string, string> = {
    'Cache-Control': 'no-cache',
    'X-Content-Type-Options': 'nosniff',
    'Cross-Origin-Resource-Policy': 'same-origin',
    ...(isolated && { 'Cross-Origin-Opener-Policy': 'same-origin', 'Cross-Origin-Embedder-Policy': 'require-corp' }),
  };
  const server = createServer((request, response) => {
    // Another site must not reach this server through a name that it points here.
    const host = (request.headers.host ?? '').replace(/:\d+$/, '');
    const file = findFile(folder, request.url ?? '/');
    if (!['127.0.0.1', 'localhost'].includes(host) || (request.method !== 'GET' && request.method !== 'HEAD') || !file) {
      response.writeHead(file ? 403 : 404, headers).end();
      return;
    }
    response.writeHead(200, { ...headers, 'Content-Type': types[extname(file)] ?? 'application/octet-stream' });
    if (request.method === 'HEAD') response.end();
    else createReadStream(file).pipe(response);
  });
  return listening(server, port);
}

/** The file behind a request, never outside the folder. */
function findFile(folder: string, url: string): string | undefined {
  try {
    const path = normalize(decodeURIComponent(new URL(url, 'http://127.0.0.1').pathname));
    const file = join(folder, path.endsWith(sep) ? `${path}index.html` : path);
    return file.startsWith(folder) && statSync(file).isFile() ? file : undefined;
  } catch {
    return undefined;
  }
}

function listening(server: Server, port: number): Promise<PageServer> {
  return new Promise((resolve, reject) => {
    server.once('error', (error: NodeJS.ErrnoException) => {
      const reason = error.code === 'EADDRINUSE' ? `port ${port} is taken: give another with --port, or 0 for any` : error.message;
      reject(new InputError(reason, { flag: `--port ${port}` }));
    });
    server.listen(port, '127.0.0.1', () => {
      const address = server.address();
      const actual = typeof address === 'object' && address ? address.port : port;
      resolve({
        url: `http://127.0.0.1:${actual}/`,
        close: () =>
          new Promise((done) => {
            server.close(() => done());
            server.closeAllConnections();
          }),
      });
    });
  });
}
