import { formatQuantity } from './quantity.ts';

/** What values a quantity may take, in `unit`. */
export interface Limits {
  /** Unit text; '' for plain numbers. */
  readonly unit: string;
  readonly min: number;
  readonly max: number;
  /** `min` itself is not allowed. */
  readonly above?: boolean;
  /** Only whole numbers are allowed. */
  readonly whole?: boolean;
  /** 0 is not allowed although it lies in the range. */
  readonly nonZero?: boolean;
}

/** The limits in words: "0 to 50 kpc", "more than 1 and at most 5", "a whole number, 1 to 20". */
export function describeLimits({ unit, min, max, above, whole, nonZero }: Limits): string {
  const high = formatQuantity(max, unit);
  const range = above ? `more than ${formatQuantity(min, '')} and at most ${high}` : `${formatQuantity(min, '')} to ${high}`;
  return `${whole ? 'a whole number, ' : ''}${range}${nonZero ? ', not 0' : ''}`;
}

/** What is wrong with a number in `limits.unit`, or undefined; `given` is how the user wrote it. */
export function findLimitProblem(value: number, limits: Limits, given: string): string | undefined {
  const { min, max, above, whole, nonZero } = limits;
  const inside = value <= max && (above ? value > min : value >= min);
  if (inside && !(whole && !Number.isInteger(value)) && !(nonZero && value === 0)) return undefined;
  return whole || above || (inside && nonZero)
    ? `${given} is not allowed: ${describeLimits(limits)}`
    : `${given} is outside ${describeLimits(limits)}`;
}
