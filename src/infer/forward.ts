/**
 * A model of the data as a function of free parameters: maps [row * nx + column] that match the
 * planes of a data set in order, grid, beam and unit, without noise. `values` are in the units of
 * the parameters' priors. Must give the same maps for the same values, and stop when `signal` does.
 */
export interface ForwardModel {
  (values: Float64Array, signal?: AbortSignal): Promise<readonly Float64Array[]>;
  /** Maps with their own derivatives, where the model has them; undefined where differences are as cheap. */
  readonly slopes?: (values: Float64Array, signal?: AbortSignal) => Promise<ModelSlopes | undefined>;
}

/** Maps of a model and their derivatives by its parameters. */
export interface ModelSlopes {
  readonly maps: readonly Float64Array[];
  /** Per parameter the derivatives of all maps, over its unit; undefined where differences must do. */
  readonly columns: readonly (readonly Float64Array[] | undefined)[];
}
