import type { Law, LawParameter, LawValues } from './types.ts';

/**
 * Two sources side by side in the beam or sector, each under a law of its own. Parameters are those
 * of the first, then those of the second, marked 1 and 2. Meant for sectors and integrated light: a
 * pixel rarely has the signal to tell.
 */
export function sumOfTwo(first: Law, second: Law): Law {
  const count = first.parameters.length;
  const marked = (law: Law, mark: string): LawParameter[] => law.parameters.map((parameter) => ({ ...parameter, name: `${parameter.name}${mark}` }));
  return {
    name: `${first.name}+${second.name}`,
    title: `${first.title}, and beside it: ${second.title.toLowerCase()}`,
    source: `sum of two: ${first.source}${second === first ? '' : `; ${second.source}`}`,
    parameters: [...marked(first, '1'), ...marked(second, '2')],
    value: (square, values) => {
      const all = Array.from(values);
      const [a, b] = [first.value(square, all.slice(0, count)), second.value(square, all.slice(count))];
      return { re: a.re + b.re, im: a.im + b.im };
    },
    // Equal laws could change places: the brighter comes first.
    ...(second === first && {
      order: (values: LawValues) => {
        const swap = values[count] > values[0];
        return Array.from({ length: 2 * count }, (_, k) => (swap ? (k + count) % (2 * count) : k));
      },
    }),
  };
}
