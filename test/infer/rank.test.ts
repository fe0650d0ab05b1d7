import { describe, expect, it } from 'vitest';
import { decidedBy } from '../../src/infer/decided-by.ts';
import { leastSquares } from '../../src/infer/least-squares.ts';
import type { ResidualPlace } from '../../src/infer/likelihood.ts';
import { logLikelihood, makeLikelihood } from '../../src/infer/likelihood.ts';
import { evidenceGrade, informationCriteria, rankHypotheses } from '../../src/infer/rank.ts';
import type { FittedHypothesis } from '../../src/infer/rank.ts';
import { kassRaftery, polynomials } from '../reference/infer/model-selection.ts';
import { testAxes, testData } from './grids.ts';

const fitted = (name: string, chi2: number, parameters = 2, more: Partial<FittedHypothesis> = {}): FittedHypothesis => ({
  name, chi2, parameters, logLikelihood: -chi2 / 2, count: 100, residualCount: 102, ...more,
});

describe('information criteria', () => {
  it('agree with 13.lin.d0, d1, d2, fitted through the whole chain', async () => {
    const { x, y, sigma, expected } = polynomials;
    const likelihood = makeLikelihood(testData(testAxes(6, 1), [{ values: Float64Array.from(y), noise: sigma }]));
    const fits: FittedHypothesis[] = [];
    for (const [degree, { logLikelihood: logL, aic, bic, aicc }] of expected.entries()) {
      const model = (c: Float64Array): Float64Array => Float64Array.from(x, (t) => c.reduceRight((sum, value) => sum * t + value, 0));
      const result = await leastSquares(async (c) => likelihood.residuals([model(c)]), new Float64Array(degree + 1));
      const here = logLikelihood(likelihood, result.residuals);
      const criteria = informationCriteria(here, degree + 1, 6);
      // The reference asks for 1e-8; it is printed to nine digits.
      const near = (value: number, reference: number): void => expect(Math.abs(value / reference - 1)).toBeLessThan(1e-8);
      near(here, logL);
      near(criteria.aic, aic);
      near(criteria.bic, bic);
      near(criteria.aicc, aicc);
      fits.push({ name: `degree ${degree}`, chi2: result.chi2, logLikelihood: here, parameters: degree + 1, count: 6, residualCount: 6 });
    }
    const { hypotheses, verdict } = rankHypotheses(fits);
    expect(hypotheses.map(({ name }) => name)).toEqual(['degree 1', 'degree 2', 'degree 0']);
    expect(verdict).toContain('cannot tell "degree 1" and "degree 2" apart');
    expect(verdict).toContain('but prefer them over "degree 0": very strong evidence');
  });

  it('have no AICc where there are as many parameters as values', () => {
    expect(informationCriteria(0, 5, 6).aicc).toBe(Infinity);
    expect(informationCriteria(0, 4, 6).aicc).toBe(8 + 40);
  });

  it('are graded as Kass & Raftery 1995 do', () => {
    const below = ['bare mention', 'positive', 'strong', 'very strong'];
    kassRaftery.forEach((limit, k) => {
      expect(evidenceGrade(limit - 1e-9)).toBe(below[k]);
      expect(evidenceGrade(limit)).toBe(below[k + 1]);
    });
  });
});

describe('rankHypotheses', () => {
  it('orders by BIC and gives differences', () => {
    const { hypotheses, verdict } = rankHypotheses([fitted('worse', 107, 2), fitted('best', 100, 2), fitted('rich', 99, 4)]);
    expect(hypotheses.map(({ name }) => name)).toEqual(['best', 'worse', 'rich']);
    expect(hypotheses[1]).toMatchObject({ deltaBic: 7, deltaAic: 7, grade: 'strong', degreesOfFreedom: 100, reducedChi2: 1.07 });
    // 2 ln 100 - 1
    expect(Math.abs(hypotheses[2].deltaBic - (2 * Math.log(100) - 1))).toBeLessThan(1e-12);
    expect(verdict).toBe(
      'The data prefer "best" over "worse": strong evidence on the scale of Kass & Raftery 1995 (Delta BIC 7.0, ln Bayes factor about 3.5).',
    );
  });

  it('says when the data cannot tell', () => {
    expect(rankHypotheses([fitted('a', 100), fitted('b', 101.5)]).verdict).toBe(
      'The data cannot tell "a" and "b" apart (Delta BIC 1.5, ln Bayes factor about 0.8).',
    );
    expect(rankHypotheses([fitted('a', 100)]).verdict).toContain('Only "a" was fitted');
  });

  it('says when nothing fits, or all fits too well', () => {
    expect(rankHypotheses([fitted('a', 300), fitted('b', 400)]).verdict).toContain(
      'But not even that one describes the data: chi2 300.0 for 100 degrees of freedom, 14.1 sigma too high',
    );
    expect(rankHypotheses([fitted('a', 20), fitted('b', 40)]).verdict).toContain('fits too well to be believed');
    expect(rankHypotheses([fitted('a', 120), fitted('b', 140)]).verdict).not.toContain('But');
  });

  it('refuses fits to different data', () => {
    expect(() => rankHypotheses([])).toThrow('no hypothesis');
    expect(() => rankHypotheses([fitted('a', 1), fitted('b', 1, 2, { count: 99 })])).toThrow('different data');
  });
});

describe('decidedBy', () => {
  const channels = [{ frequencyHz: 1.4e9, widthHz: 0 }];
  const data = {
    bands: [{ name: '1.4 GHz', channels }, { name: '4.8 GHz', channels }],
    planes: [0, 0, 1, 1].map((band, k) => ({
      quantity: k % 2 === 0 ? ('Q' as const) : ('U' as const), band, channel: 0, values: new Float64Array(0), noise: 1,
    })),
  };
  // 36 places in each plane, every 10 deg of azimuth.
  const places: ResidualPlace[] = data.planes.flatMap((_, plane) =>
    Array.from({ length: 36 }, (__, k) => ({ plane, pixelX: k, pixelY: 0, slow: 0, fast: k })),
  );
  const azimuth = ({ pixelX }: ResidualPlace): number => (pixelX * Math.PI) / 18 - Math.PI;
  const zero = new Float64Array(places.length);

  it('names band and azimuths', () => {
    // The other model fails in U at 1.4 GHz between azimuths 80 and 130 deg, a little elsewhere.
    const other = Float64Array.from(places, ({ plane, pixelX }) => (plane === 1 && pixelX >= 26 && pixelX <= 31 ? 3 : plane === 2 ? 0.5 : 0));
    const decided = decidedBy(data, places, zero, other, azimuth);
    expect(decided.deltaChi2).toBe(54 + 9);
    expect(decided.planes).toEqual([0, 54, 9, 0]);
    expect(decided.bands).toEqual([54, 9]);
    expect(decided.band).toBe(0);
    // Sectors of 30 deg, the first centred on 0: 80-100 and 110-130 hold three places each.
    expect(decided.sectors[3]).toBe(27);
    expect(decided.sectors[4]).toBe(27);
    expect(decided.sentence).toBe(
      'Decided by band 1.4 GHz: chi2 differs by 54.0 there (63.0 in all), two thirds of it at galaxy azimuths 75 to 135 deg.',
    );
  });

  it('finds arcs across azimuth 0', () => {
    const other = Float64Array.from(places, ({ plane, pixelX }) => (plane === 0 && pixelX >= 16 && pixelX <= 21 ? 2 : 0));
    // Azimuths -20 to 30 deg; two sectors hold five of the six.
    const { arc } = decidedBy(data, places, zero, other, azimuth);
    expect(Math.round((arc!.from * 180) / Math.PI)).toBe(-15);
    expect(Math.round((arc!.to * 180) / Math.PI)).toBe(45);
  });

  it('says when no azimuth stands out, or fewer parameters decide', () => {
    const even = zero.map(() => 1);
    expect(decidedBy(data, places, zero, even, azimuth).sentence).toContain('spread over more than half of all azimuths');
    expect(decidedBy(data, places, zero, even, () => undefined).arc).toBeUndefined();
    expect(decidedBy(data, places, even, zero, azimuth).sentence).toContain('fewer parameters');
  });
});
