/**
 * f'(x) by the central difference of order six (Fornberg 1988, table 1): its error is f⁽⁷⁾ h⁶/140, beside
 * the rounding of f over `step`. For smooth functions that are exact to the last digits.
 */
export function sixthOrderSlope(f: (x: number) => number, x: number, step: number): number {
  const across = (times: number): number => f(x + times * step) - f(x - times * step);
  return (45 * across(1) - 9 * across(2) + across(3)) / (60 * step);
}
