/** Where in a user's input something is wrong. Lines and columns count from 1. */
export interface Place {
  readonly file?: string;
  readonly line?: number;
  readonly column?: number;
  /** A command-line flag such as `--set galaxy.inclination=…`, where the input came from one. */
  readonly flag?: string;
}

/** `file:line:column`, `file`, or the flag; empty where nothing is known. */
export function placeText(place: Place | undefined): string {
  if (!place) return '';
  if (place.flag) return place.flag;
  return [place.file, place.line, place.column].filter((part) => part !== undefined).join(':');
}

/**
 * The user's input is wrong: the message says what, the value given, and what is allowed. The
 * command line prints it without a stack and exits with 2; the page shows it beside its place.
 */
export class InputError extends Error {
  readonly place: Place | undefined;
  /** The message without its place. */
  readonly reason: string;

  constructor(reason: string, place?: Place) {
    const where = placeText(place);
    super(where ? `${where}: ${reason}` : reason);
    this.name = 'InputError';
    this.reason = reason;
    this.place = place;
  }

  /** The same error, placed; a place already known is kept. */
  at(place: Place): InputError {
    return new InputError(this.reason, { ...place, ...this.place });
  }
}

/** The allowed name nearest to `given` by edit distance, or undefined where none is near. */
export function findNearest(given: string, allowed: Iterable<string>): string | undefined {
  let best: string | undefined;
  let bestDistance = Math.max(2, Math.floor(given.length / 3)) + 1;
  for (const name of allowed) {
    const distance = editDistance(given.toLowerCase(), name.toLowerCase());
    if (distance < bestDistance) {
      bestDistance = distance;
      best = name;
    }
  }
  return best;
}

/** ` (did you mean "x"?)` or nothing: the tail of a message about an unknown name. */
export function nearestHint(given: string, allowed: Iterable<string>): string {
  const nearest = findNearest(given, allowed);
  return nearest === undefined ? '' : ` (did you mean "${nearest}"?)`;
}

/** Insertions, deletions and replacements between two texts (Levenshtein 1966). */
function editDistance(a: string, b: string): number {
  let previous = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++) {
      const replace = previous[j - 1] + (a[i - 1] === b[j - 1] ? 0 : 1);
      row.push(Math.min(previous[j] + 1, row[j - 1] + 1, replace));
    }
    previous = row;
  }
  return previous[b.length];
}
