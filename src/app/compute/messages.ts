import type { Place } from '../../units/input-error.ts';
import type { ColumnPicture, ObservedPicture } from './column-picture.ts';
import type { FitPicture, FitProgressTold } from './work-fit.ts';
import type { PlacePicture } from './work-place.ts';

/** Files that tasks read, by name; a worker is given them once. */
export interface DataFiles {
  /** Changes whenever a file or the study's data do. */
  readonly key: string;
  /** Text of a study whose data count; undefined where there are none to hold scenes against. */
  readonly studyText?: string;
  readonly files: Readonly<Record<string, Uint8Array>>;
}

/** A column to be drawn. */
export interface DrawTask {
  readonly kind: 'draw';
  readonly name: string;
  readonly sceneText: string;
  readonly ringKpc?: readonly [number, number];
  readonly exact: boolean;
  readonly dataKey: string;
}

/** The observation's own column, its rings laid as this scene's galaxy lies. */
export interface ObservedTask {
  readonly kind: 'observed';
  readonly name: string;
  readonly sceneText: string;
  readonly ringKpc?: readonly [number, number];
  readonly dataKey: string;
}

/** One place of a column, looked at closely. */
export interface PlaceTask {
  readonly kind: 'place';
  readonly name: string;
  readonly sceneText: string;
  readonly northKpc: number;
  readonly eastKpc: number;
  readonly dataKey: string;
}

/** A column to be fitted to the data as a hypothesis of a study. */
export interface FitTask {
  readonly kind: 'fit';
  readonly name: string;
  readonly sceneText: string;
  readonly studyText: string;
  readonly dataKey: string;
}

export type Task = DrawTask | ObservedTask | PlaceTask | FitTask;

/** What each kind of task brings. */
interface Results {
  readonly draw: ColumnPicture;
  readonly observed: ObservedPicture;
  readonly place: PlacePicture;
  readonly fit: FitPicture;
}

export type TaskResult<T extends Task> = Results[T['kind']];

export type AnyResult = Results[Task['kind']];

/** What went wrong: the user's input with its place, or a fault of ours. */
export interface Trouble {
  readonly reason: string;
  readonly place?: Place;
  readonly isInput: boolean;
}

/** The end of a task in a worker. */
export type Outcome<Value> = { readonly value: Value } | { readonly trouble: Trouble } | { readonly cancelled: true };

/** What a worker of the page answers to. */
export interface PageWorker {
  setData(data: DataFiles): Promise<Outcome<null>>;
  run(task: Task, tell: FitProgressTold): Promise<Outcome<AnyResult>>;
  /** Ends the running task; it answers `cancelled`. */
  cancel(): Promise<void>;
}
