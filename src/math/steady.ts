// Functions that give the same bits everywhere. `Math.pow`, `Math.sin` and `Math.cos` differ in their
// last bits between versions of one engine; exp and log have long been the same.

/** base^exponent for a base above 0, to about 1e-16 times 1 + |exponent ln base|. */
export function steadyPower(base: number, exponent: number): number {
  return Math.exp(exponent * Math.log(base));
}

/** pi/2 in two parts, the first with so few bits that its multiples are exact. */
const [quarterHigh, quarterLow] = [1.5707963267341256, 6.077100506506192e-11];

/** [sin, cos] of an angle, rad, within a few thousand turns, to about 2e-16: Taylor series in the quarter nearest to it. */
export function steadySineCosine(angle: number): readonly [number, number] {
  const quarter = Math.round(angle / (Math.PI / 2));
  const x = angle - quarter * quarterHigh - quarter * quarterLow;
  const square = x * x;
  let [sine, cosine] = [1, 1];
  for (let n = 20; n >= 2; n -= 2) {
    sine = 1 - (sine * square) / (n * (n + 1));
    cosine = 1 - (cosine * square) / (n * (n - 1));
  }
  sine *= x;
  switch (((quarter % 4) + 4) % 4) {
    case 0: return [sine, cosine];
    case 1: return [cosine, -sine];
    case 2: return [-sine, -cosine];
    default: return [-cosine, sine];
  }
}
