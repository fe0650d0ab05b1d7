import { linePlot } from './line-plot.ts';
import type { PlotSeries } from './line-plot.ts';
import { svgDocument } from './svg.ts';
import type { Drawing } from './svg.ts';
import { hypothesisStyle, lightTheme } from './theme.ts';
import type { Theme } from './theme.ts';
import type { Tick } from './ticks.ts';

/** Values in sectors of a ring; arrays of equal length. */
export interface AzimuthValues {
  readonly label: string;
  /** Galaxy azimuth of the sectors' middles, deg: 0 on the receding half of the major axis. */
  readonly azimuthDeg: ArrayLike<number>;
  readonly value: ArrayLike<number>;
  /** One standard deviation. */
  readonly error?: ArrayLike<number>;
  /** Given where the profile belongs to a column that is not the curve's place in the list. */
  readonly colour?: string;
  readonly dash?: string;
}

export interface AzimuthProfile {
  /** Such as `P` or `RM`. */
  readonly quantity: string;
  readonly unit: string;
  /** Models, drawn as lines that close after a full turn. */
  readonly curves: readonly AzimuthValues[];
  /** Observed, drawn as points over them. */
  readonly data?: readonly AzimuthValues[];
  /** Of the quantity, in `unit`; give one to compare plots. */
  readonly domain?: readonly [number, number];
}

export interface AzimuthProfileOptions {
  readonly width?: number;
  readonly height?: number;
  readonly legend?: boolean;
  readonly theme?: Theme;
}

/** The near side of the disc is -y, whichever way the galaxy turns. */
const QUARTERS: readonly Tick[] = [
  { value: 0, label: '0°\nreceding' },
  { value: 90, label: '90°\nfar' },
  { value: 180, label: '180°\napproaching' },
  { value: 270, label: '270°\nnear' },
  { value: 360, label: '360°' },
];

/** The same where there is no room for every word. */
const QUARTERS_NARROW: readonly Tick[] = QUARTERS.map(({ value, label }) => ({
  value,
  label: value % 180 === 0 ? label : label.split('\n')[0],
}));

/** Narrowest drawing that has room for the words at every quarter, px. */
const ROOM_FOR_WORDS = 300;

/** A profile round a ring against galaxy azimuth, 0 to 360 deg; signed quantities do not start at 0. */
export function azimuthProfile(profile: AzimuthProfile, options: AzimuthProfileOptions = {}): Drawing {
  const { width = 420, height = 220, legend = true, theme = lightTheme } = options;
  const series: PlotSeries[] = [
    ...profile.curves.map((curve, k): PlotSeries => {
      const style = hypothesisStyle(k, theme);
      return { ...fullTurn(curve), label: curve.label, draw: 'line', colour: curve.colour ?? style.colour, dash: curve.colour ? curve.dash : style.dash };
    }),
    ...(profile.data ?? []).map((data): PlotSeries => ({
      x: data.azimuthDeg, y: data.value, error: data.error, label: data.label, draw: 'points', colour: data.colour ?? theme.ink,
    })),
  ];
  return linePlot({
    series,
    x: { label: '', domain: [0, 360], ticks: width < ROOM_FOR_WORDS ? QUARTERS_NARROW : QUARTERS },
    y: { label: profile.quantity, unit: profile.unit, domain: profile.domain, fromZero: true },
    width,
    height,
    legend,
    theme,
  });
}

/** `azimuthProfile` as a whole SVG file. */
export function azimuthProfileSvg(profile: AzimuthProfile, options: AzimuthProfileOptions = {}): string {
  const theme = options.theme ?? lightTheme;
  return svgDocument(azimuthProfile(profile, options), {
    title: `${profile.quantity} against galaxy azimuth`,
    ink: theme.ink,
    paper: theme.paper,
  });
}

/** The curve in order of azimuth, carried on over both ends so that it spans the whole axis. */
function fullTurn(curve: AzimuthValues): Pick<PlotSeries, 'x' | 'y' | 'error'> {
  const turned = (degrees: number): number => degrees - 360 * Math.floor(degrees / 360);
  const order = Array.from({ length: curve.azimuthDeg.length }, (_, k) => k)
    .sort((a, b) => turned(curve.azimuthDeg[a]) - turned(curve.azimuthDeg[b]));
  const laps = [-360, 0, 360].flatMap((lap) => order.map((k) => ({ k, x: turned(curve.azimuthDeg[k]) + lap })));
  const kept = laps.filter((_, n) => (laps[n + 1]?.x ?? -1) >= 0 && (laps[n - 1]?.x ?? 361) <= 360);
  const { error } = curve;
  return { x: kept.map(({ x }) => x), y: kept.map(({ k }) => curve.value[k]), error: error ? kept.map(({ k }) => error[k]) : undefined };
}
