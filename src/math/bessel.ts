/** Beyond this the asymptotic series is exact to rounding; below it the power series is. */
const largeArgument = 30;

/**
 * ln I0(x) of the modified Bessel function for x >= 0: power series, and beyond x = 30 the
 * asymptotic one (Abramowitz & Stegun 1964, 9.6.12 and 9.7.1).
 */
export function logBesselI0(x: number): number {
  return x < largeArgument ? Math.log(powerSeries(x, 0)) : x - Math.log(2 * Math.PI * x) / 2 + Math.log(asymptotic(x, 0));
}

/** I1(x)/I0(x) for x >= 0. */
export function besselRatio(x: number): number {
  return x < largeArgument ? powerSeries(x, 1) / powerSeries(x, 0) : asymptotic(x, 1) / asymptotic(x, 0);
}

function powerSeries(x: number, order: 0 | 1): number {
  const quarter = (x * x) / 4;
  let term = order === 0 ? 1 : x / 2;
  let sum = term;
  for (let k = 1; term > 1e-17 * sum; k++) {
    term *= quarter / (k * (k + order));
    sum += term;
  }
  return sum;
}

/** The bracket of the asymptotic series. */
function asymptotic(x: number, order: 0 | 1): number {
  const mu = 4 * order * order;
  let term = 1;
  let sum = 1;
  for (let k = 1; k < 25 && Math.abs(term) > 1e-17; k++) {
    term *= -(mu - (2 * k - 1) ** 2) / (k * 8 * x);
    sum += term;
  }
  return sum;
}
