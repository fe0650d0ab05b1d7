import { expect, it } from 'vitest';
import { coverage } from './turbulent-coverage.ts';

it('covers the truth of 40 data sets made from realisations of a turbulent galaxy at least 33 times with the covariance, less often without', async () => {
  const { withCovariance, without, chi2PerN } = await coverage(40);
  console.log(`inside 95 % regions: ${withCovariance} of 40 with the covariance (chi2/N ${chi2PerN.toFixed(2)}), ${without} without`);
  expect(withCovariance).toBeGreaterThanOrEqual(33);
  expect(without).toBeLessThan(33);
}, 3_600_000);
