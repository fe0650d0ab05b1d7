/** The sum of correlations is cut at this many autocorrelation times (Sokal 1997, section 3). */
const windowTimes = 5;

/** Longer series are averaged in blocks down to this length: the time comes out the same, for less work. */
const mostBlocks = 1000;

/**
 * Integrated autocorrelation time, in steps, of series of equal length, one per walker, about their
 * common mean: 1 + 2 sum rho(lag), cut at the first lag beyond five times itself (Sokal 1997; Goodman
 * & Weare 2010, section 5). At least 1; NaN where nothing varies.
 */
export function autocorrelationTime(series: readonly ArrayLike<number>[]): number {
  const block = Math.ceil(series[0].length / mostBlocks);
  const variance = correlationsOf(series)(0);
  if (!(variance > 0)) return NaN;
  const blocks = block === 1 ? series : series.map((one) => blockMeans(one, block));
  const correlation = correlationsOf(blocks);
  const blockVariance = correlation(0);
  let time = 1;
  for (let lag = 1; lag < blocks[0].length; lag++) {
    time += (2 * correlation(lag)) / blockVariance;
    if (lag >= windowTimes * time) break;
  }
  return Math.max(1, (block * blockVariance * time) / variance);
}

/** Mean product of values a lag apart, about the common mean. */
function correlationsOf(series: readonly ArrayLike<number>[]): (lag: number) => number {
  const length = series[0].length;
  let sum = 0;
  for (const one of series) for (let k = 0; k < length; k++) sum += one[k];
  const mean = sum / (length * series.length);
  const centred = series.map((one) => Float64Array.from(one, (value) => value - mean));
  return (lag) => {
    let products = 0;
    for (const one of centred) for (let k = lag; k < length; k++) products += one[k] * one[k - lag];
    return products / (length * series.length);
  };
}

function blockMeans(one: ArrayLike<number>, block: number): Float64Array {
  return Float64Array.from({ length: Math.floor(one.length / block) }, (_, b) => {
    let sum = 0;
    for (let k = b * block; k < (b + 1) * block; k++) sum += one[k];
    return sum / block;
  });
}

/** How far a chain can be believed. */
export interface ChainTrust {
  /** Autocorrelation time of each parameter, steps; too short a chain underestimates it. */
  readonly timesSteps: Float64Array;
  /** Steps left out at the start. */
  readonly burnIn: number;
  readonly believable: boolean;
  /** Why not, a plain sentence; empty where it is. */
  readonly reason: string;
}

/** A chain shorter than this many autocorrelation times cannot even tell them (Goodman & Weare 2010 in practice). */
const wantedTimes = 50;
/** Halves of a chain whose means differ by more of their own errors have not settled. */
const settledSigma = 4;

/**
 * Judges a chain, [step][walker][parameter] given by `at`: the first quarter is left out; the rest must hold
 * fifty autocorrelation times of every parameter and have the same mean in both its halves.
 */
export function judgeChain(steps: number, walkers: number, parameters: number, at: (step: number, walker: number, parameter: number) => number): ChainTrust {
  const burnIn = Math.floor(steps / 4);
  const kept = steps - burnIn;
  const series = (j: number, from: number, to: number): Float64Array[] =>
    Array.from({ length: walkers }, (_, w) => Float64Array.from({ length: to - from }, (_, k) => at(from + k, w, j)));
  const timesSteps = new Float64Array(parameters);
  let reason = '';
  const refuse = (words: string): void => void (reason ||= words);
  if (kept < 20) return { timesSteps: timesSteps.fill(NaN), burnIn, believable: false, reason: `The chain has ${steps} steps only.` };
  for (let j = 0; j < parameters; j++) {
    const time = (timesSteps[j] = autocorrelationTime(series(j, burnIn, steps)));
    if (Number.isNaN(time)) refuse(`Parameter ${j + 1} never moved.`);
    else if (kept < wantedTimes * time) {
      refuse(`The chain is ${(kept / time).toFixed(0)} autocorrelation times long in parameter ${j + 1}; ${wantedTimes} are wanted.`);
    }
    const middle = burnIn + Math.floor(kept / 2);
    const [first, second] = [momentsOf(series(j, burnIn, middle)), momentsOf(series(j, middle, steps))];
    const error = Math.sqrt(((first.variance + second.variance) * time) / (walkers * (kept / 2)));
    if (Math.abs(first.mean - second.mean) > settledSigma * error) refuse(`The mean of parameter ${j + 1} is still drifting.`);
  }
  return { timesSteps, burnIn, believable: reason === '', reason };
}

function momentsOf(series: readonly Float64Array[]): { mean: number; variance: number } {
  let [sum, squares, count] = [0, 0, 0];
  const origin = series[0][0];
  for (const one of series) {
    for (const value of one) {
      sum += value - origin;
      squares += (value - origin) ** 2;
      count++;
    }
  }
  return { mean: origin + sum / count, variance: squares / count - (sum / count) ** 2 };
}
