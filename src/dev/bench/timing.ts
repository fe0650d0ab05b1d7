/** What a run gave, and the CPU it took. */
export interface Timed<T> {
  readonly value: T;
  /** CPU of this process, all threads, s. */
  readonly seconds: number;
}

/** The quickest of several runs, by CPU: what else the machine does only ever adds. */
export function quickest<T>(runs: number, run: () => T): Timed<T> {
  let best: Timed<T> | undefined;
  for (let k = 0; k < runs; k++) {
    const start = process.cpuUsage();
    const value = run();
    const { user, system } = process.cpuUsage(start);
    const seconds = (user + system) / 1e6;
    if (!best || seconds < best.seconds) best = { value, seconds };
  }
  if (!best) throw new Error('no runs');
  return best;
}

/** Value at a share of a sorted list. */
export function percentile(sorted: ArrayLike<number>, share: number): number {
  return sorted[Math.floor(share * (sorted.length - 1))];
}

/** Three digits, or a dash where there is nothing. */
export function cell(value: number | undefined): string {
  return (value === undefined ? '–' : value.toPrecision(3)).padStart(10);
}
