import seedrandom from 'seedrandom';

/** A seeded stream of uniform and Gaussian numbers, the same wherever it runs. */
export interface RandomStream {
  /** Uniform in [0, 1). */
  uniform(): number;
  /** Gaussian of zero mean and unit variance (Box & Muller 1958). */
  gaussian(): number;
}

/**
 * The stream of a name: keyed by (seed, name, index), never by the worker it runs in, so that
 * results do not depend on where they were computed.
 */
export function randomStream(seed: number, name: string, index = 0): RandomStream {
  const generator = seedrandom(`${seed}/${name}/${index}`);
  let spare: number | undefined;
  const uniform = (): number => generator.double();
  const gaussian = (): number => {
    if (spare !== undefined) {
      const value = spare;
      spare = undefined;
      return value;
    }
    const radius = Math.sqrt(-2 * Math.log(1 - uniform()));
    const angle = 2 * Math.PI * uniform();
    spare = radius * Math.sin(angle);
    return radius * Math.cos(angle);
  };
  return { uniform, gaussian };
}
