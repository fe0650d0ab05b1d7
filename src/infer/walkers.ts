import { randomStream } from '../math/random.ts';
import { judgeChain } from './autocorrelation.ts';
import type { ChainTrust } from './autocorrelation.ts';
import { evaluateDensities } from './log-density.ts';
import type { LogDensities } from './log-density.ts';
import { differenceMove, stretchMove } from './walker-moves.ts';

/** Where a run stands, plain JSON: a run that is resumed from it goes on bit for bit. */
export interface WalkerState {
  readonly steps: number;
  readonly evaluations: number;
  readonly accepted: number;
  /** Latest positions, [walker][parameter], and ln densities. */
  readonly positions: readonly (readonly number[])[];
  readonly logDensities: readonly number[];
  /** Every step so far, [step][walker * parameters + parameter] and [step][walker]. */
  readonly chain: readonly (readonly number[])[];
  readonly chainLogDensities: readonly (readonly number[])[];
}

export interface WalkerRequest {
  readonly density: LogDensities;
  /** One point per walker, twice as many as parameters or more, of finite density. */
  readonly start: readonly ArrayLike<number>[];
  readonly seed: number;
  readonly maxSteps: number;
  /** Steps between looks at convergence and checkpoints; default 100. */
  readonly checkEvery?: number;
  /** Share of steps by differential evolution, the others stretch; default 0.4. */
  readonly differenceShare?: number;
  readonly resume?: WalkerState;
  /** Called every `checkEvery` steps; the state must be copied or written at once. */
  readonly onCheckpoint?: (state: WalkerState, trust: ChainTrust) => void;
  readonly signal?: AbortSignal;
}

export interface WalkerResult extends ChainTrust {
  /** Positions after burn-in, step by step, with ln densities. */
  readonly samples: readonly Float64Array[];
  readonly sampleLogDensities: Float64Array;
  /** samples / longest autocorrelation time. */
  readonly effectiveSamples: number;
  readonly acceptance: number;
  readonly steps: number;
  readonly evaluations: number;
  readonly state: WalkerState;
}

/**
 * Samples a density by an ensemble of walkers: affine-invariant stretch moves (Goodman & Weare 2010)
 * mixed with differential evolution (ter Braak 2006), one half of the walkers from the other at a
 * time. Ends when the chain can be believed, or at `maxSteps` with `believable` false and the reason.
 * Throws where there are too few walkers or a start has no density, and the signal's reason.
 */
export async function runWalkers(request: WalkerRequest): Promise<WalkerResult> {
  const { density, seed, signal, checkEvery = 100, differenceShare = 0.4 } = request;
  const run = request.resume ? copyState(request.resume) : await startState(request);
  const walkers = run.positions.length;
  const parameters = run.positions[0].length;
  const judge = (): ChainTrust => judgeChain(run.steps, walkers, parameters, (step, w, j) => run.chain[step][w * parameters + j]);
  let trust = judge();
  const half = Math.floor(walkers / 2);
  const halves = [range(0, half), range(half, walkers)];
  while (run.steps < request.maxSteps && !(run.steps % checkEvery === 0 && trust.believable)) {
    const random = randomStream(seed, 'walkers', run.steps);
    const move = random.uniform() < differenceShare ? differenceMove : stretchMove;
    for (const [side, moving] of halves.entries()) {
      const others = halves[1 - side].map((w) => run.positions[w]);
      const proposals = moving.map((w) => move(random, run.positions[w], others));
      const there = await evaluateDensities(density, proposals.map(({ point }) => point), signal);
      run.evaluations += moving.length;
      moving.forEach((w, k) => {
        if (Math.log(1 - random.uniform()) > proposals[k].logFactor + there[k] - run.logDensities[w]) return;
        run.positions[w] = [...proposals[k].point];
        run.logDensities[w] = there[k];
        run.accepted++;
      });
    }
    run.chain.push(run.positions.flat());
    run.chainLogDensities.push([...run.logDensities]);
    run.steps++;
    if (run.steps % checkEvery !== 0) continue;
    trust = judge();
    request.onCheckpoint?.(run, trust);
  }
  trust = judge();
  const samples: Float64Array[] = [];
  const kept: number[] = [];
  for (let step = trust.burnIn; step < run.steps; step++) {
    for (let w = 0; w < walkers; w++) {
      samples.push(Float64Array.from(run.chain[step].slice(w * parameters, (w + 1) * parameters)));
      kept.push(run.chainLogDensities[step][w]);
    }
  }
  return {
    ...trust,
    samples,
    sampleLogDensities: Float64Array.from(kept),
    effectiveSamples: samples.length / Math.max(...trust.timesSteps),
    acceptance: run.accepted / (run.steps * walkers),
    steps: run.steps,
    evaluations: run.evaluations,
    state: run,
  };
}

/** The state while it grows. */
interface GrowingState extends WalkerState {
  steps: number;
  evaluations: number;
  accepted: number;
  positions: number[][];
  logDensities: number[];
  chain: number[][];
  chainLogDensities: number[][];
}

async function startState({ density, start, signal }: WalkerRequest): Promise<GrowingState> {
  const parameters = start[0]?.length ?? 0;
  if (parameters === 0) throw new Error('Walkers need at least one parameter.');
  if (start.length < Math.max(4, 2 * parameters)) {
    throw new Error(`${start.length} walkers are given for ${parameters} parameters; ${Math.max(4, 2 * parameters)} are needed.`);
  }
  const positions = start.map((point) => Array.from(point));
  const logDensities = Array.from(await evaluateDensities(density, positions.map((point) => Float64Array.from(point)), signal));
  const lost = logDensities.findIndex((value) => !Number.isFinite(value));
  if (lost >= 0) throw new Error(`Walker ${lost + 1} starts where the density is 0.`);
  return { steps: 0, evaluations: start.length, accepted: 0, positions, logDensities, chain: [], chainLogDensities: [] };
}

function copyState(state: WalkerState): GrowingState {
  return {
    ...state,
    positions: state.positions.map((point) => [...point]),
    logDensities: [...state.logDensities],
    chain: state.chain.map((step) => [...step]),
    chainLogDensities: state.chainLogDensities.map((step) => [...step]),
  };
}

function range(from: number, to: number): number[] {
  return Array.from({ length: to - from }, (_, k) => from + k);
}
