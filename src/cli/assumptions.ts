/**
 * What readers of data assumed, gathered: sentences `file: what` that hold for several files become
 * one line, with the files behind it unless it holds for all.
 */
export function gatherAssumptions(sentences: readonly string[]): readonly string[] {
  const filesBySentence = new Map<string, Set<string>>();
  const all = new Set<string>();
  for (const sentence of sentences) {
    const colon = sentence.indexOf(': ');
    const [file, what] = colon > 0 ? [sentence.slice(0, colon), sentence.slice(colon + 2)] : ['', sentence];
    const files = filesBySentence.get(what) ?? new Set<string>();
    if (file !== '') files.add(file);
    if (file !== '') all.add(file);
    filesBySentence.set(what, files);
  }
  return [...filesBySentence].map(([what, files]) => {
    if (files.size === 0) return what;
    return files.size === all.size && all.size > 1 ? `all maps: ${what}` : `${[...files].join(', ')}: ${what}`;
  });
}
