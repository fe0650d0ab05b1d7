import { InputError } from '../units/input-error.ts';
import { readPageFile, writePageFile } from './document/page-file.ts';
import type { PageDocument } from './document/page-document.ts';
import type { PageFiles } from './store.ts';

const documentKey = 'gyrelight page';
const databaseName = 'gyrelight';
const filesName = 'files';

/** The page as it was when it was last left, or undefined where there is none that can be read. */
export async function recallPage(): Promise<{ readonly page: PageDocument; readonly files: PageFiles } | undefined> {
  const text = readSafely(() => localStorage.getItem(documentKey));
  if (!text) return undefined;
  try {
    const { page } = readPageFile(text, 'the kept page');
    return { page, files: await readFiles() };
  } catch (error) {
    if (error instanceof InputError) return undefined;
    throw error;
  }
}

/** Keeps the document; true where the browser let it. */
export function keepPage(page: PageDocument): boolean {
  return readSafely(() => {
    localStorage.setItem(documentKey, writePageFile(page, {}));
    return true;
  }) ?? false;
}

/** Keeps the files in the browser's database; where it has none they are not kept. */
export async function keepFiles(files: PageFiles): Promise<void> {
  const database = await openDatabase();
  if (!database) return;
  const transaction = database.transaction(filesName, 'readwrite');
  const store = transaction.objectStore(filesName);
  store.clear();
  for (const [name, bytes] of Object.entries(files)) store.put(bytes, name);
  await new Promise<void>((resolve) => {
    transaction.oncomplete = transaction.onerror = transaction.onabort = () => resolve();
  });
  database.close();
}

async function readFiles(): Promise<PageFiles> {
  const database = await openDatabase();
  if (!database) return {};
  const store = database.transaction(filesName).objectStore(filesName);
  const [names, values] = await Promise.all([answerOf(store.getAllKeys()), answerOf(store.getAll())]);
  database.close();
  return Object.fromEntries((names ?? []).map((name, k) => [String(name), values?.[k] as Uint8Array]));
}

function openDatabase(): Promise<IDBDatabase | undefined> {
  const request = readSafely(() => indexedDB.open(databaseName, 1));
  if (!request) return Promise.resolve(undefined);
  request.onupgradeneeded = () => request.result.createObjectStore(filesName);
  return answerOf(request);
}

function answerOf<Value>(request: IDBRequest<Value>): Promise<Value | undefined> {
  return new Promise((resolve) => {
    request.onsuccess = () => resolve(request.result);
    request.onerror = () => resolve(undefined);
  });
}

/** Storage may be forbidden or full: then the page works all the same. */
function readSafely<Value>(read: () => Value): Value | undefined {
  try {
    return read();
  } catch {
    return undefined;
  }
}
