import { serveRays } from './serve-rays.ts';

// The entry of a worker of the browser. It holds a lock of the name it was given for as long as it
// lives: browsers say nothing when a worker dies, but they let go of its locks.
const scope = globalThis as unknown as Worker & { readonly name: string };
const ready = (): void => scope.postMessage('ready');
serveRays(scope);
if (navigator.locks) {
  const held = (): Promise<never> => {
    ready();
    return new Promise<never>(() => undefined);
  };
  void navigator.locks.request(scope.name, held);
} else ready();
