/** A copy of an object that lacks one key. */
export function withoutKey<Value extends object, Key extends keyof Value>(value: Value, key: Key): Omit<Value, Key> {
  return Object.fromEntries(Object.entries(value).filter(([name]) => name !== key)) as Omit<Value, Key>;
}
