/** One candidate geometry: a scene's text, exactly as its file, and what a fit may change in it. */
export interface PageColumn {
  /** Stays with the column through every edit. */
  readonly id: string;
  readonly name: string;
  /** YAML text of the scene: what the command line reads. */
  readonly scene: string;
  /** The hypothesis's other keys as a study has them: `free`, `tied`, `derived`. */
  readonly hypothesis: Readonly<Record<string, unknown>>;
}

/** A row of the line-up: what is shown of every column. */
export type RowKind = 'shape' | 'polarization' | 'rotation-measure' | 'ring' | 'verdict';

export interface PageRow {
  readonly kind: RowKind;
  /** Which band, for polarization: its place in the order of frequency. */
  readonly band?: number;
}

/** How the observer of the field lines stands; undefined angles follow each column's own galaxy. */
export interface ShapeView {
  /** rad, turned about the vertical of the screen and about its horizontal. */
  readonly turn: number;
  readonly tilt: number;
  readonly colourBy: 'strength' | 'line-of-sight';
}

/** All that a user can change on the page, and undo. */
export interface PageDocument {
  readonly title: string;
  readonly columns: readonly PageColumn[];
  /** Id of the column whose knobs are shown. */
  readonly chosen: string;
  /** Column that the others are shown less of; undefined shows each as it is. */
  readonly differenceFrom?: string;
  readonly rows: readonly PageRow[];
  /** The study's other keys (`data`, `method`, `foreground` …), as plain values; no data: no observation. */
  readonly study: Readonly<Record<string, unknown>>;
  /** Inner and outer radius of the profiles' ring, kpc; undefined: chosen by the galaxy's size. */
  readonly ringKpc?: readonly [number, number];
  readonly shape: ShapeView;
  readonly theme: 'light' | 'dark';
}

/** The first name of the form `base`, `base 2`, `base 3` … that no column has. */
export function freeName(base: string, columns: readonly PageColumn[]): string {
  const names = new Set(columns.map(({ name }) => name));
  for (let k = 1; ; k++) {
    const name = k === 1 ? base : `${base} ${k}`;
    if (!names.has(name)) return name;
  }
}

/** An id that no column has. */
export function freeId(columns: readonly PageColumn[]): string {
  const ids = new Set(columns.map(({ id }) => id));
  for (let k = columns.length + 1; ; k++) if (!ids.has(`c${k}`)) return `c${k}`;
}

/** The column of an id. */
export function findColumn({ columns }: Pick<PageDocument, 'columns'>, id: string): PageColumn | undefined {
  return columns.find((column) => column.id === id);
}
