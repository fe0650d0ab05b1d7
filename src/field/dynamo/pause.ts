/**
 * Called between pieces of a long computation: says how far it is, lets others have their turn, and
 * rejects where the computation is to stop.
 */
export type Pause = (what: string, done: number, total: number) => Promise<void>;

/** For computations that nobody watches. */
export const noPause: Pause = () => Promise.resolve();
