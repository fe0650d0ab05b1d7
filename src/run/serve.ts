/** One that works on items, one at a time. */
export interface ItemWorker<Item> {
  work(item: Item): Promise<void>;
}

/**
 * Hands items to workers, each the next as soon as it is free. The first error, or the signal's reason,
 * ends the handing out; it is thrown once every worker has finished what it was at.
 */
export async function serveItems<Item>(
  workers: readonly ItemWorker<Item>[],
  items: Iterable<Item>,
  { onDone, signal }: { readonly onDone?: (item: Item) => void; readonly signal?: AbortSignal } = {},
): Promise<void> {
  const source = items[Symbol.iterator]();
  let failed = false;
  const serve = async (worker: ItemWorker<Item>): Promise<void> => {
    while (!failed) {
      const next = source.next();
      if (next.done) return;
      try {
        signal?.throwIfAborted();
        await worker.work(next.value);
      } catch (problem) {
        failed = true;
        throw problem;
      }
      onDone?.(next.value);
    }
  };
  const outcomes = await Promise.allSettled(workers.map(serve));
  for (const outcome of outcomes) if (outcome.status === 'rejected') throw outcome.reason;
}
