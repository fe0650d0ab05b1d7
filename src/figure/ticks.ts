import { scaleLinear } from 'd3-scale';
import { precisionFixed } from 'd3-format';
import { fixedText, superscript } from './number-text.ts';

export interface Tick {
  readonly value: number;
  readonly label: string;
}

/** Round tick values inside [low, high], about `count` of them, with labels of equal decimals. */
export function tidyTicks(low: number, high: number, count: number): readonly Tick[] {
  const values = scaleLinear().domain([low, high]).ticks(count);
  const step = values.length > 1 ? Math.abs(values[1] - values[0]) : Math.abs(values[0] ?? 1) || 1;
  const largest = Math.max(0, ...values.map(Math.abs));
  if (largest < 1e6 && (largest >= 1e-3 || largest === 0)) {
    return values.map((value) => ({ value, label: fixedText(value, precisionFixed(step)) }));
  }
  const exponent = Math.floor(Math.log10(largest));
  const decimals = precisionFixed(step / 10 ** exponent);
  return values.map((value) => ({
    value,
    label: value === 0 ? '0' : `${fixedText(value / 10 ** exponent, decimals)}×10${superscript(String(exponent))}`,
  }));
}

/** The largest of 1, 2, 5 times a power of ten that is not above `limit` (> 0). */
export function roundLength(limit: number): number {
  const power = 10 ** Math.floor(Math.log10(limit));
  const times = [5, 2, 1].find((step) => step * power <= limit * (1 + 1e-12)) ?? 1;
  return times * power;
}
