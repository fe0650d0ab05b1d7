/** Colours of everything that is not data. */
export interface Theme {
  /** Ground; undefined where the page beneath gives it. */
  readonly paper: string | undefined;
  /** Ground colour for gaps inside a picture, such as the filling of a marker. */
  readonly gap: string;
  readonly ink: string;
  /** Labels and ticks. */
  readonly soft: string;
  /** Grid lines, hatching, frames of tables. */
  readonly rule: string;
}

export const lightTheme: Theme = {
  paper: '#fdfcf9', gap: '#fdfcf9', ink: '#22252a', soft: '#5b616a', rule: '#d8d5ce',
};

export const darkTheme: Theme = {
  paper: '#14161a', gap: '#14161a', ink: '#e8e5de', soft: '#a7abb2', rule: '#3a3e45',
};

/** For pictures inside a page that sets these properties for light and dark, as the report does. */
export const pageTheme: Theme = {
  paper: undefined, gap: 'var(--paper)', ink: 'var(--ink)', soft: 'var(--soft)', rule: 'var(--rule)',
};

/** CSS declarations of the properties that `pageTheme` reads. */
export function themeProperties(theme: Theme): string {
  return `--paper:${theme.gap};--ink:${theme.ink};--soft:${theme.soft};--rule:${theme.rule}`;
}

/** Teal and amber, the two accents; both stand 3:1 against either ground. */
export const TEAL = '#0f857c';
export const AMBER = '#c47f00';

/**
 * Colours of hypotheses after ink, teal and amber: found by search for the largest CIELAB distance
 * between any two of the seven under normal, protan and deutan vision (Machado et al. 2009).
 */
const MORE_COLOURS = ['#6655cc', '#cc3333', '#6688bb', '#00a361'];

/** How the curve of one hypothesis is drawn; dash and marker tell it apart without colour. */
export interface HypothesisStyle {
  readonly colour: string;
  /** SVG dash pattern; undefined is a full line. */
  readonly dash: string | undefined;
}

const DASHES = [undefined, '7 3', '2 2.5', '9 3 2 3', '5 2 1.5 2 1.5 2', '12 3', '4 4'];

/** Style of hypothesis `index` (from 0); beyond seven the colours come again with another dash. */
export function hypothesisStyle(index: number, theme: Theme): HypothesisStyle {
  const colours = [theme.ink, TEAL, AMBER, ...MORE_COLOURS];
  const round = Math.floor(index / colours.length);
  return { colour: colours[index % colours.length], dash: DASHES[(index + round) % DASHES.length] };
}

/** Lines and words drawn over a map: a line colour and the thin casing that sets it off. */
export interface OverlayInk {
  readonly line: string;
  readonly casing: string;
}

/** Light over the dark intensities, dark over signed maps (pale at zero) and angles. */
export function overlayInk(kind: 'intensity' | 'signed' | 'angle'): OverlayInk {
  return kind === 'intensity'
    ? { line: '#ffffff', casing: '#10151f' }
    : { line: '#16181c', casing: '#ffffff' };
}
