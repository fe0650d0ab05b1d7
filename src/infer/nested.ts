import { randomStream } from '../math/random.ts';
import { boundEfficiency, boundLogVolume, boundPoints, closestEllipsoid, drawFromBound, isInCube } from './ellipsoids.ts';
import type { Bound } from './ellipsoids.ts';
import { evidenceOf, fromPrior } from './evidence.ts';
import type { Evidence, NestedPoint } from './evidence.ts';
import { evaluateDensities } from './log-density.ts';
import type { LogDensities } from './log-density.ts';
import { sliceWalk } from './slice-move.ts';

/** Where a run stands, plain JSON: a run that is resumed from it goes on bit for bit. */
export interface NestedState {
  readonly evaluations: number;
  /** Points that have died, and how often candidates were drawn. */
  readonly deaths: number;
  readonly draws: number;
  readonly live: readonly NestedPoint[];
  readonly dead: readonly NestedPoint[];
  /** Candidates evaluated and not yet looked at. */
  readonly waiting: readonly { readonly point: readonly number[]; readonly logLikelihood: number }[];
  readonly bound: Bound;
  /** Deaths and evaluations when the bound was made. */
  readonly boundSince: readonly [number, number];
  /** Candidates come from slices, no longer from the whole bound. */
  readonly slicing: boolean;
}

export interface NestedRequest {
  /** ln likelihood at points of the unit cube, whose transform is the prior. */
  readonly likelihood: LogDensities;
  readonly parameters: number;
  readonly seed: number;
  /** Default 400, at least twice the parameters. */
  readonly livePoints?: number;
  /** Ends when the live points could add no more than this to ln Z; default 0.01. */
  readonly remaining?: number;
  /** Candidates evaluated together; the result depends on it, never on who evaluates. Default 4. */
  readonly together?: number;
  /** `auto`: from the whole bound while that is the cheaper, then by slices. */
  readonly moves?: 'auto' | 'bound' | 'slices';
  readonly maxEvaluations?: number;
  readonly resume?: NestedState;
  /** Deaths between checkpoints; default a tenth of the live points. The state must be copied or written at once. */
  readonly checkpointEvery?: number;
  readonly onCheckpoint?: (state: NestedState, progress: NestedProgress) => void;
  readonly signal?: AbortSignal;
}

export interface NestedProgress {
  readonly logEvidence: number;
  /** What the live points could still add to ln Z. */
  readonly remaining: number;
}

export interface NestedResult extends Evidence {
  readonly evaluations: number;
  /** False where `maxEvaluations` came first: ln Z is then a lower limit. */
  readonly converged: boolean;
  readonly slicing: boolean;
}

/** A likelihood below this is taken as this, so that a state is plain JSON. */
const lowest = -1e300;
/** The bound is made anew after this share of live points has died. */
const renewShare = 0.2;
/** Evaluations of one slice, about: two ends found, two or three shrinkings. */
const evaluationsPerSlice = 5;

/**
 * Nested sampling (Skilling 2006): the live point of least likelihood dies and is replaced by one
 * drawn from the prior above its likelihood: uniformly from ellipsoids around the live points (Feroz,
 * Hobson & Bridges 2009), and where too few of those are above, by slice walks (Neal 2003) on the
 * ellipsoids' scale. Throws for too few live points, and the signal's reason.
 */
export async function runNested(request: NestedRequest): Promise<NestedResult> {
  const { seed, signal, parameters: n, moves = 'auto', together = 4, remaining: wanted = 0.01 } = request;
  const count = request.livePoints ?? Math.max(400, 25 * n);
  if (n < 1) throw new Error('Nested sampling needs at least one parameter.');
  if (count < 2 * n + 2) throw new Error(`${count} live points are given for ${n} parameters; ${2 * n + 2} are needed.`);
  const evaluate = async (points: readonly Float64Array[]): Promise<number[]> =>
    Array.from(await evaluateDensities(request.likelihood, points, signal), (value) => Math.max(value, lowest));
  const slices = n + 3 + Math.ceil(n / 2);

  const run = request.resume ? copyState(request.resume) : await startState(seed, n, count, evaluate);
  if (moves === 'slices') run.slicing = true;
  const every = request.checkpointEvery ?? Math.ceil(count / 10);
  let tally = tallyOf(run.dead, count);
  const progress = (): NestedProgress => progressOf(run, tally);
  let converged = progress().remaining < wanted;
  while (!converged && run.evaluations < (request.maxEvaluations ?? Infinity)) {
    if (run.waiting.length === 0) await draw();
    const candidate = run.waiting.shift();
    if (!candidate) continue;
    const worst = run.live.reduce((least, one, k) => (one.logLikelihood < run.live[least].logLikelihood ? k : least), 0);
    const threshold = run.live[worst].logLikelihood;
    if (!(candidate.logLikelihood > threshold)) continue;
    const dying = run.live[worst];
    run.dead.push(dying);
    run.live[worst] = { ...candidate, birth: threshold };
    run.deaths++;
    tally = addTo(tally, dying.logLikelihood, count);
    if (run.deaths % every === 0) {
      const now = progress();
      converged = now.remaining < wanted;
      request.onCheckpoint?.(run, now);
    }
  }
  return { ...evidenceOf([...run.dead, ...run.live], seed), evaluations: run.evaluations, converged, slicing: run.slicing };

  /** Evaluates the next candidates, from a new bound where it is time. */
  async function draw(): Promise<void> {
    const [deaths, evaluations] = run.boundSince;
    const old = run.deaths - deaths >= renewShare * count;
    const poor = run.evaluations - evaluations > 4 * count && !run.slicing;
    if (old || poor || run.bound.length === 0) {
      const logVolume = -run.deaths / count;
      run.bound = boundPoints(run.live.map(({ point }) => point), logVolume);
      run.boundSince = [run.deaths, run.evaluations];
      const efficiency = boundEfficiency(run.bound, logVolume, randomStream(seed, 'efficiency', run.draws));
      if (moves === 'auto') run.slicing = efficiency < 1 / (slices * evaluationsPerSlice);
    }
    const index = run.draws++;
    if (run.slicing) {
      const threshold = Math.min(...run.live.map(({ logLikelihood }) => logLikelihood));
      const walks = await Promise.all(
        Array.from({ length: together }, (_, k) => {
          const random = randomStream(seed, `slices ${k}`, index);
          const { point } = run.live[Math.floor(random.uniform() * count)];
          const scale = closestEllipsoid(run.bound, point);
          return sliceWalk(point, threshold, scale, slices, random, async (at) => (await evaluate([at]))[0]);
        }),
      );
      run.waiting.push(...walks.map(({ point, logLikelihood }) => ({ point: [...point], logLikelihood })));
      run.evaluations += walks.reduce((sum, walk) => sum + walk.evaluations, 0);
      return;
    }
    const random = randomStream(seed, 'candidates', index);
    const points = Array.from({ length: together }, () => pointInCube(run.bound, random));
    const values = await evaluate(points);
    run.evaluations += points.length;
    run.waiting.push(...points.map((point, k) => ({ point: [...point], logLikelihood: values[k] })));
  }
}

/** What a finished run is, plain JSON: its evidence follows from its points. */
export type NestedRun = Pick<NestedResult, 'points' | 'evaluations' | 'converged' | 'slicing'>;

/** Puts runs of one problem, with different seeds, together: the evidence of all their points (Higson et al. 2018). */
export function mergeNested(runs: readonly NestedRun[], seed = 0): NestedResult {
  return {
    ...evidenceOf(runs.flatMap(({ points }) => points), seed),
    evaluations: runs.reduce((sum, run) => sum + run.evaluations, 0),
    converged: runs.every((run) => run.converged),
    slicing: runs.some((run) => run.slicing),
  };
}

/** The state while it grows. */
interface GrowingState extends NestedState {
  evaluations: number;
  deaths: number;
  draws: number;
  live: NestedPoint[];
  dead: NestedPoint[];
  waiting: { readonly point: readonly number[]; readonly logLikelihood: number }[];
  bound: Bound;
  boundSince: readonly [number, number];
  slicing: boolean;
}

async function startState(
  seed: number, n: number, count: number, evaluate: (points: readonly Float64Array[]) => Promise<number[]>,
): Promise<GrowingState> {
  const random = randomStream(seed, 'live points');
  const points = Array.from({ length: count }, () => cubePoint(n, random));
  const values = await evaluate(points);
  const live = points.map((point, k): NestedPoint => ({ point: [...point], logLikelihood: values[k], birth: fromPrior }));
  return { evaluations: count, deaths: 0, draws: 0, live, dead: [], waiting: [], bound: [], boundSince: [0, count], slicing: false };
}

function copyState(state: NestedState): GrowingState {
  return { ...state, live: [...state.live], dead: [...state.dead], waiting: [...state.waiting] };
}

function cubePoint(n: number, random: ReturnType<typeof randomStream>): Float64Array {
  return Float64Array.from({ length: n }, () => random.uniform());
}

/** A point from the bound within the cube; from the cube itself where the bound is far larger. */
function pointInCube(bound: Bound, random: ReturnType<typeof randomStream>): Float64Array {
  if (boundLogVolume(bound) > 9) return cubePoint(bound[0].centre.length, random);
  for (;;) {
    const point = drawFromBound(bound, random);
    if (isInCube(point)) return point;
  }
}

/** ln Z and ln X while the run goes on, with exp(-1/live) a death. */
interface Tally {
  readonly logEvidence: number;
  readonly logVolume: number;
}

function addTo({ logEvidence, logVolume }: Tally, logLikelihood: number, count: number): Tally {
  const term = logLikelihood + logVolume + Math.log(-Math.expm1(-1 / count));
  const larger = Math.max(logEvidence, term);
  return { logEvidence: larger + Math.log1p(Math.exp(Math.min(logEvidence, term) - larger)), logVolume: logVolume - 1 / count };
}

function tallyOf(dead: readonly NestedPoint[], count: number): Tally {
  return dead.reduce((tally, { logLikelihood }) => addTo(tally, logLikelihood, count), { logEvidence: -Infinity, logVolume: 0 });
}

function progressOf({ live }: GrowingState, { logEvidence, logVolume }: Tally): NestedProgress {
  const largest = Math.max(...live.map(({ logLikelihood }) => logLikelihood));
  const rest = largest + logVolume;
  const remaining = logEvidence === -Infinity ? Infinity : Math.log1p(Math.exp(rest - logEvidence));
  return { logEvidence, remaining };
}
