import { expect, test } from 'vitest';
import { fitLaws, makeLawFitter } from '../../src/infer/law-fit.ts';
import { randomStream } from '../../src/math/random.ts';
import { laws } from '../../src/measure/laws/index.ts';
import { relativeError } from '../sky/compare.ts';
import { allLaws, drawPulls, truths } from './law-draws.ts';

const lambda2 = Float64Array.from({ length: 40 }, (_, k) => (0.299792458 / (1 + k / 39)) ** 2);

test.each(allLaws.map((law) => [law.name, law] as const))('%s: without noise what was put in comes back', async (name, law) => {
  const spectrum = Array.from(lambda2, (square) => law.value(square, truths[name]));
  const data = { lambda2M2: lambda2, q: Float64Array.from(spectrum, ({ re }) => re), u: Float64Array.from(spectrum, ({ im }) => im), sigma: lambda2.map(() => 1e-3) };
  const [fit] = await fitLaws([law], data);
  // Stops where chi^2 falls by less than 1e-9 of itself, or steps are 1e-9: errors are 1e-3 or so of the values.
  truths[name].forEach((value, k) => expect(relativeError(fit.values[k], value), law.parameters[k].name).toBeLessThan(1e-4));
  expect(fit.chi2).toBeLessThan(1e-3);
});

test('noise makes no bias and the errors are right: two laws here, all in law-fit.long.test.ts', async () => {
  for (const name of ['burn-slab', 'external-dispersion']) {
    const law = allLaws.find((one) => one.name === name);
    if (!law) throw new Error(name);
    const draws = 200;
    const { mean, width, chi2 } = await drawPulls(law, 0.002, draws);
    for (const value of mean) expect(Math.abs(value), name).toBeLessThan(4 / Math.sqrt(draws));
    // 4 sigma of the width of 200 draws.
    for (const value of width) expect(Math.abs(value - 1), name).toBeLessThan(4 / Math.sqrt(2 * draws));
    expect(Math.abs(chi2 - 1)).toBeLessThan(4 * Math.sqrt(2 / 90 / draws));
  }
});

test('the law that made a spectrum is the best, by AIC and BIC of the textbook', async () => {
  const law = allLaws.find(({ name }) => name === 'internal-dispersion');
  if (!law) throw new Error('internal-dispersion');
  const { gaussian } = randomStream(1, 'best');
  const clean = Array.from(lambda2, (square) => law.value(square, truths[law.name]));
  const sigma = 0.002;
  const data = {
    lambda2M2: lambda2,
    q: Float64Array.from(clean, ({ re }) => re + sigma * gaussian()),
    u: Float64Array.from(clean, ({ im }) => im + sigma * gaussian()),
    sigma: lambda2.map(() => sigma),
  };
  const fits = await fitLaws(laws, data);
  expect(fits[0].law.name).toBe('internal-dispersion');
  for (const fit of fits) {
    const k = fit.law.parameters.length;
    expect(relativeError(fit.aic, fit.chi2 + 2 * k)).toBeLessThan(1e-12);
    expect(relativeError(fit.bic, fit.chi2 + k * Math.log(80))).toBeLessThan(1e-12);
    expect(fit.degreesOfFreedom).toBe(80 - k);
  }
  // External dispersion and a gradient are one law by two names.
  const [a, b] = ['external-dispersion', 'depth-gradient'].map((name) => fits.find((fit) => fit.law.name === name)?.chi2 ?? NaN);
  expect(relativeError(a, b)).toBeLessThan(1e-6);
});

test('without stated noise errors come from the scatter; blanks are left out; too few channels refused', async () => {
  const law = laws[0];
  const { gaussian } = randomStream(2, 'scatter');
  const clean = Array.from(lambda2, (square) => law.value(square, [0.3, 0.5, 42]));
  const q = Float64Array.from(clean, ({ re }) => re + 0.01 * gaussian());
  const u = Float64Array.from(clean, ({ im }) => im + 0.01 * gaussian());
  [q[3], u[17]] = [NaN, NaN];
  const [plain] = await fitLaws([law], { lambda2M2: lambda2, q, u, sigma: new Float64Array(40) });
  const [stated] = await fitLaws([law], { lambda2M2: lambda2, q, u, sigma: lambda2.map(() => 0.01) });
  plain.values.forEach((value, k) => expect(relativeError(value, stated.values[k])).toBeLessThan(1e-5));
  // The scatter of 73 degrees of freedom is known to 8 %; 4 sigma.
  plain.errors.forEach((error, k) => expect(relativeError(error, stated.errors[k])).toBeLessThan(0.34));
  expect(stated.degreesOfFreedom).toBe(76 - 3);
  expect(() => makeLawFitter(law, Float64Array.of(0.01), Float64Array.of(1), 100)).toThrow(/1 channels cannot tell the 3 parameters/);
});
