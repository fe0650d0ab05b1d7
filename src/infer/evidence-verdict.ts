import { evidenceGrade } from './rank.ts';

/** A hypothesis with its evidence. */
export interface JudgedHypothesis {
  readonly name: string;
  readonly logEvidence: number;
  /** One standard deviation. */
  readonly error: number;
}

/** Two hypotheses compared: the likelier first. */
export interface EvidencePair {
  readonly preferred: string;
  readonly other: string;
  /** ln of the Bayes factor, not negative, with one standard deviation. */
  readonly deltaLogEvidence: number;
  readonly error: number;
  /** False where the data cannot tell. */
  readonly decided: boolean;
  readonly sentence: string;
}

/** A difference must be this many of its own standard deviations to be one. */
const tellingSigma = 2;

/**
 * Every pair of hypotheses in plain sentences on the scale of Kass & Raftery 1995 (section 3.2: 2 ln B
 * of 2, 6, 10). Where 2 ln B is below 2, or the difference not twice its own error, the data cannot tell.
 */
export function compareEvidences(hypotheses: readonly JudgedHypothesis[]): EvidencePair[] {
  const ordered = [...hypotheses].sort((a, b) => b.logEvidence - a.logEvidence);
  return ordered.flatMap((first, k) => ordered.slice(k + 1).map((other) => comparePair(first, other)));
}

function comparePair(first: JudgedHypothesis, other: JudgedHypothesis): EvidencePair {
  const deltaLogEvidence = first.logEvidence - other.logEvidence;
  const error = Math.hypot(first.error, other.error);
  const grade = evidenceGrade(2 * deltaLogEvidence);
  const decided = grade !== 'bare mention' && deltaLogEvidence >= tellingSigma * error;
  const number = `Δ ln Z = ${deltaLogEvidence.toFixed(1)} ± ${error.toFixed(1)}`;
  return {
    preferred: first.name,
    other: other.name,
    deltaLogEvidence,
    error,
    decided,
    sentence: decided
      ? `The data prefer "${first.name}" over "${other.name}": ${grade} evidence on the scale of Kass & Raftery 1995 (${number}).`
      : `The data cannot tell "${first.name}" from "${other.name}" (${number}).`,
  };
}

/** What evidences amount to, in a sentence or two: which hypotheses stand, and what the next best is worth. */
export function evidenceVerdict(hypotheses: readonly JudgedHypothesis[]): string {
  const pairs = compareEvidences(hypotheses);
  if (pairs.length === 0) return `Only "${hypotheses[0].name}" was sampled, so there is nothing to prefer it to.`;
  const best = pairs[0].preferred;
  const ofBest = pairs.filter(({ preferred }) => preferred === best);
  const equal = ofBest.filter(({ decided }) => !decided);
  const beaten = ofBest.find(({ decided }) => decided);
  if (equal.length === 0) return beaten!.sentence;
  const names = [best, ...equal.map(({ other }) => other)].map((name) => `"${name}"`);
  const list = `${names.slice(0, -1).join(', ')} and ${names[names.length - 1]}`;
  const last = equal[equal.length - 1];
  const tie = `The data cannot tell ${list} apart (Δ ln Z = ${last.deltaLogEvidence.toFixed(1)} ± ${last.error.toFixed(1)})`;
  return beaten ? `${tie}. ${beaten.sentence}` : `${tie}.`;
}
