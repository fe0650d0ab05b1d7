const LONGEST = 60;

/** A user's value as it appears in a message: texts in quotes, long ones cut. */
export function quoteValue(value: unknown): string {
  if (value === null) return 'nothing';
  if (typeof value === 'string') return JSON.stringify(value.length > LONGEST ? `${value.slice(0, LONGEST)}…` : value);
  if (Array.isArray(value)) return `a list of ${value.length}`;
  if (typeof value === 'object') return 'a group of keys';
  return String(value);
}
