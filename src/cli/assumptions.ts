/**
 * What readers of data assumed, gathered: sentences `file: what` that hold for several files become
 * one line with the files behind it.
 */
export function gatherAssumptions(sentences: readonly string[]): readonly string[] {
  const filesBySentence = new Map<string, string[]>();
  for (const sentence of sentences) {
    const colon = sentence.indexOf(': ');
    const [file, what] = colon > 0 ? [sentence.slice(0, colon), sentence.slice(colon + 2)] : ['', sentence];
    filesBySentence.set(what, [...(filesBySentence.get(what) ?? []), file]);
  }
  return [...filesBySentence].map(([what, files]) => {
    const named = files.filter((file) => file !== '');
    return named.length === 0 ? what : `${what} (${named.join(', ')})`;
  });
}
