import type { PageDocument } from './page-document.ts';

/** Documents before and after the present one. */
export interface History {
  readonly past: readonly PageDocument[];
  readonly present: PageDocument;
  readonly future: readonly PageDocument[];
  /** What the last change was: one of the same name goes on with it, so that a drag is one step. */
  readonly lastChange?: string;
}

/** Steps that are kept. */
const longest = 200;

export function startHistory(present: PageDocument): History {
  return { past: [], present, future: [] };
}

/** Makes `next` the present. Changes in a row with the same `name` are one step to undo. */
export function commit(history: History, next: PageDocument, name?: string): History {
  if (next === history.present) return history;
  const goesOn = name !== undefined && name === history.lastChange;
  const past = goesOn ? history.past : [...history.past, history.present].slice(-longest);
  return { past, present: next, future: [], lastChange: name };
}

/** Ends a series of changes of one name. */
export function settle(history: History): History {
  return history.lastChange === undefined ? history : { ...history, lastChange: undefined };
}

export function undo({ past, present, future }: History): History {
  const before = past[past.length - 1];
  return before ? { past: past.slice(0, -1), present: before, future: [present, ...future] } : { past, present, future };
}

export function redo({ past, present, future }: History): History {
  const [after, ...rest] = future;
  return after ? { past: [...past, present], present: after, future: rest } : { past, present, future };
}
