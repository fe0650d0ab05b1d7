import { linePlot } from './line-plot.ts';
import type { PlotSeries } from './line-plot.ts';
import { svgDocument } from './svg.ts';
import { hypothesisStyle, lightTheme } from './theme.ts';
import type { Theme } from './theme.ts';

/** What each candidate band would add, one truth a series; arrays of equal length. */
export interface ForecastSeries {
  /** Such as `if "halo" is true`. */
  readonly label: string;
  readonly deltaLogEvidence: ArrayLike<number>;
  readonly scatter: ArrayLike<number>;
  /** From the data that there are, without another band. */
  readonly now: number;
}

/** Expected Δ ln Z against the candidates' frequency, with the scatter of noise as bars and today's as lines. */
export function forecastSvg(frequencyGHz: ArrayLike<number>, series: readonly ForecastSeries[], theme: Theme = lightTheme): string {
  const low = Math.min(...Array.from(frequencyGHz));
  const high = Math.max(...Array.from(frequencyGHz));
  const room = (high - low) / 20 || high / 10;
  const domain = [Math.max(0, low - room), high + room] as const;
  const drawn = series.flatMap((one, k): PlotSeries[] => {
    const { colour, dash } = hypothesisStyle(k, theme);
    return [
      { label: one.label, draw: 'points', x: frequencyGHz, y: one.deltaLogEvidence, error: one.scatter, colour },
      { label: `${one.label}: no other band`, draw: 'line', x: domain, y: [one.now, one.now], colour, dash: dash ?? '4 3' },
    ];
  });
  const drawing = linePlot({
    series: drawn, x: { label: 'frequency of the added band (GHz)', domain }, y: { label: 'expected Δ ln Z for the true one', fromZero: true },
    width: 560, height: 320, legend: true, theme,
  });
  return svgDocument(drawing, { title: 'Which further band would separate the hypotheses', ink: theme.ink, paper: theme.paper });
}
