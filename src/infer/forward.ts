/**
 * A model of the data as a function of free parameters: maps [row * nx + column] that match the
 * planes of a data set in order, grid, beam and unit, without noise. `values` are in the units of
 * the parameters' priors. Must give the same maps for the same values, and stop when `signal` does.
 */
export type ForwardModel = (values: Float64Array, signal?: AbortSignal) => Promise<readonly Float64Array[]>;
