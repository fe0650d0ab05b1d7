/** Special functions of one real argument; each is checked against scipy in the tests. */

/** Error function to about 1e-15 relative: Taylor series (Abramowitz & Stegun 1964, 7.1.6), continued fraction beyond 2.5. */
export function erf(x: number): number {
  const t = Math.abs(x);
  if (t > 6) return Math.sign(x);
  if (t > 2.5) return Math.sign(x) * (1 - erfcFraction(t));
  let term = t;
  let sum = t;
  for (let n = 1; n < 200 && Math.abs(term) > 1e-17 * sum; n++) {
    term *= (2 * t * t) / (2 * n + 1);
    sum += term;
  }
  return (Math.sign(x) * (2 / Math.sqrt(Math.PI)) * Math.exp(-t * t) * sum);
}

/** erfc(x) for x > 2 by its continued fraction (Abramowitz & Stegun 1964, 7.1.14), evaluated from the tail. */
function erfcFraction(x: number): number {
  let fraction = x;
  for (let n = 120; n >= 1; n--) fraction = x + n / 2 / fraction;
  return Math.exp(-x * x) / Math.sqrt(Math.PI) / fraction;
}

/**
 * 1 - (1 + u) e^-u, the lower incomplete gamma function of order 2, accurate relative to itself
 * also at u → 0, where it is u²/2 - u³/3 + …
 */
export function incompleteGamma2(u: number): number {
  if (Math.abs(u) > 0.5) return 1 - (1 + u) * Math.exp(-u);
  // Σ_{n≥2} (-1)^n (n-1)/n! u^n
  let power = (u * u) / 2;
  let sum = power;
  for (let n = 3; n < 24; n++) {
    power *= -u / n;
    sum += (n - 1) * power;
  }
  return sum;
}

/** ln Γ(x) for x > 0 by Stirling's series beyond x = 15 (Abramowitz & Stegun 1964, 6.1.41), reached by recurrence. */
export function logGamma(x: number): number {
  let shift = 0;
  let t = x;
  while (t < 15) {
    shift += Math.log(t);
    t += 1;
  }
  const bernoulli = [1 / 12, -1 / 360, 1 / 1260, -1 / 1680, 1 / 1188, -691 / 360360, 1 / 156];
  let series = 0;
  for (let k = bernoulli.length - 1; k >= 0; k--) series = series / (t * t) + bernoulli[k];
  return (t - 0.5) * Math.log(t) - t + 0.5 * Math.log(2 * Math.PI) + series / t - shift;
}

/** Γ(x) for x > 0. */
export function gamma(x: number): number {
  return Math.exp(logGamma(x));
}

/**
 * Kummer's ₁F₁(a; b; -t) for t ≥ 0 and b > a: the all-positive series of Kummer's transformation,
 * and the asymptotic series beyond t = 60 (Abramowitz & Stegun 1964, 13.1.27 and 13.5.1).
 */
export function kummerOfMinus(a: number, b: number, t: number): number {
  if (t <= 60) {
    let term = 1;
    let sum = 1;
    for (let n = 0; n < 1000 && Math.abs(term) > 1e-18 * Math.abs(sum); n++) {
      term *= ((b - a + n) * t) / ((b + n) * (n + 1));
      sum += term;
    }
    return Math.exp(-t) * sum;
  }
  let term = 1;
  let sum = 1;
  for (let n = 0; n < 40; n++) {
    const next = (term * (a + n) * (a - b + 1 + n)) / ((n + 1) * t);
    if (next === 0 || Math.abs(next) > Math.abs(term)) break;
    term = next;
    sum += term;
  }
  return (gamma(b) / gamma(b - a)) * Math.pow(t, -a) * sum;
}
