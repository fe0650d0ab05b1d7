/** The best fit of one hypothesis to a data set. */
export interface FittedHypothesis {
  readonly name: string;
  readonly chi2: number;
  readonly logLikelihood: number;
  /** Number of free parameters. */
  readonly parameters: number;
  /** Independent values in the data, what BIC counts; and residuals, what chi2 counts. */
  readonly count: number;
  readonly residualCount: number;
}

export interface InformationCriteria {
  /** 2k - 2 ln L (Akaike 1974). */
  readonly aic: number;
  /** AIC + 2k(k+1)/(n-k-1) (Hurvich & Tsai 1989); infinite where n <= k + 1. */
  readonly aicc: number;
  /** k ln n - 2 ln L (Schwarz 1978). */
  readonly bic: number;
}

/** Kass & Raftery 1995, section 3.2: 2 ln B below 2, 6, 10 and beyond. */
export type EvidenceGrade = 'bare mention' | 'positive' | 'strong' | 'very strong';

export interface RankedHypothesis extends FittedHypothesis, InformationCriteria {
  /** Residuals less parameters. */
  readonly degreesOfFreedom: number;
  readonly reducedChi2: number;
  /** How many standard deviations chi2 lies above its expectation: (chi2 - dof)/sqrt(2 dof). */
  readonly misfitSigma: number;
  /** Above the first in rank; `deltaBic` is about 2 ln(Bayes factor) in favour of the first. */
  readonly deltaAic: number;
  readonly deltaBic: number;
  /** Of the first against this one. */
  readonly grade: EvidenceGrade;
}

export interface Ranking {
  /** By BIC, best first. */
  readonly hypotheses: readonly RankedHypothesis[];
  /** What the data say, in a sentence or two. */
  readonly verdict: string;
}

/** A true model's chi2 is not this far off: beyond it, no hypothesis describes the data. */
const misfitLimitSigma = 5;

/** AIC, AICc and BIC of a best fit with k parameters to n independent values. */
export function informationCriteria(logLikelihood: number, k: number, n: number): InformationCriteria {
  const aic = 2 * k - 2 * logLikelihood;
  return {
    aic,
    aicc: n > k + 1 ? aic + (2 * k * (k + 1)) / (n - k - 1) : Infinity,
    bic: k * Math.log(n) - 2 * logLikelihood,
  };
}

/** The words of Kass & Raftery 1995 for 2 ln(Bayes factor), or a difference of BIC in its place. */
export function evidenceGrade(twiceLogBayesFactor: number): EvidenceGrade {
  if (twiceLogBayesFactor < 2) return 'bare mention';
  if (twiceLogBayesFactor < 6) return 'positive';
  return twiceLogBayesFactor < 10 ? 'strong' : 'very strong';
}

/**
 * Ranks fits to the same data by BIC and says what they amount to. Throws where there are none, or
 * where their data differ in size.
 */
export function rankHypotheses(fits: readonly FittedHypothesis[]): Ranking {
  if (fits.length === 0) throw new Error('There is no hypothesis to rank.');
  const { count, residualCount } = fits[0];
  if (fits.some((fit) => fit.count !== count || fit.residualCount !== residualCount)) {
    throw new Error('Hypotheses that were fitted to different data cannot be ranked.');
  }
  const scored = fits
    .map((fit) => ({ ...fit, ...informationCriteria(fit.logLikelihood, fit.parameters, fit.count) }))
    .sort((a, b) => a.bic - b.bic);
  const lowestAic = Math.min(...scored.map(({ aic }) => aic));
  const hypotheses = scored.map((fit): RankedHypothesis => {
    const degreesOfFreedom = fit.residualCount - fit.parameters;
    const deltaBic = fit.bic - scored[0].bic;
    return {
      ...fit,
      degreesOfFreedom,
      reducedChi2: fit.chi2 / degreesOfFreedom,
      misfitSigma: (fit.chi2 - degreesOfFreedom) / Math.sqrt(2 * degreesOfFreedom),
      deltaAic: fit.aic - lowestAic,
      deltaBic,
      grade: evidenceGrade(deltaBic),
    };
  });
  return { hypotheses, verdict: verdict(hypotheses) };
}

function verdict(ranked: readonly RankedHypothesis[]): string {
  return [preference(ranked), misfitSentence(ranked[0])].filter((part) => part !== '').join(' ');
}

function preference(ranked: readonly RankedHypothesis[]): string {
  const [first, ...others] = ranked;
  if (others.length === 0) return `Only "${first.name}" was fitted, so there is nothing to prefer it to.`;
  const equal = others.filter(({ grade }) => grade === 'bare mention');
  const worse = others.filter(({ grade }) => grade !== 'bare mention');
  if (equal.length === 0) return `The data prefer ${quote([first])} over ${quote([worse[0]])}: ${evidence(worse[0])}.`;
  const tie = `The data cannot tell ${quote([first, ...equal])} apart (${difference(equal[equal.length - 1])})`;
  return worse.length === 0 ? `${tie}.` : `${tie}, but prefer them over ${quote([worse[0]])}: ${evidence(worse[0])}.`;
}

function evidence(other: RankedHypothesis): string {
  return `${other.grade} evidence on the scale of Kass & Raftery 1995 (${difference(other)})`;
}

function difference({ deltaBic }: RankedHypothesis): string {
  return `Delta BIC ${deltaBic.toFixed(1)}, ln Bayes factor about ${(deltaBic / 2).toFixed(1)}`;
}

/** What is wrong with the best fit, a sentence; empty where nothing is. */
export function misfitSentence(first: RankedHypothesis): string {
  const { chi2, degreesOfFreedom, misfitSigma } = first;
  const fitWords = `chi2 ${chi2.toFixed(1)} for ${degreesOfFreedom} degrees of freedom`;
  if (misfitSigma > misfitLimitSigma) {
    return `But not even that one describes the data: ${fitWords}, ${misfitSigma.toFixed(1)} sigma too high. A preference among models that all fail, or noise stated too low, decides nothing.`;
  }
  if (misfitSigma < -misfitLimitSigma) {
    return `But it fits too well to be believed: ${fitWords}, ${(-misfitSigma).toFixed(1)} sigma too low. The noise is stated too high or its correlation too long.`;
  }
  return '';
}

function quote(hypotheses: readonly RankedHypothesis[]): string {
  const names = hypotheses.map(({ name }) => `"${name}"`);
  return names.length < 2 ? names.join('') : `${names.slice(0, -1).join(', ')} and ${names[names.length - 1]}`;
}
