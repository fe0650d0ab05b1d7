import { differenceColumns, type DifferenceSteps, type ResidualFunction } from './differences.ts';
import type { ForwardModel } from './forward.ts';
import type { Likelihood } from './likelihood.ts';
import { priorResiduals, slopeFromScaled, valueFromScaled, type FreeParameter } from './prior.ts';

/**
 * Step on the scale of the fit along which residuals are differenced for given derivatives of maps.
 * Residuals of maps are linear in them; those of P and chi bend so little that 1e-8 is lost.
 */
const step = 1e-4;

/** What columns of derivatives are made of. */
export interface ColumnRequest {
  readonly parameters: readonly FreeParameter[];
  readonly forward: ForwardModel;
  readonly likelihood: Likelihood;
  /** All residuals, priors included, by following the model. */
  readonly residuals: ResidualFunction;
  /** For parameters that the model has no derivatives by. */
  readonly steps: DifferenceSteps;
  /** Called for every model that is followed for derivatives. */
  readonly onModel?: () => void;
}

/**
 * Columns d residuals/d parameter on the scale of the fit, priors included, where residuals are `at`: from the model's own
 * derivatives where it has them, else by finite differences.
 */
export async function jacobianColumns(request: ColumnRequest, scaled: Float64Array, at: Float64Array, signal?: AbortSignal): Promise<Float64Array[]> {
  const { parameters, forward, likelihood, residuals, steps } = request;
  const slopes = await forward.slopes?.(scaled.map((u, j) => valueFromScaled(parameters[j], u)), signal);
  if (!slopes) return differenceColumns(residuals, scaled, at, steps, signal);
  request.onModel?.();
  const priors = priorResiduals(parameters, scaled).length;
  // The scale of isotropic priors has no slope where they end.
  const reaches = parameters.map((parameter, j) => step * slopeFromScaled(parameter, scaled[j]));
  const missing = parameters.flatMap((_, j) => (slopes.columns[j] && Number.isFinite(reaches[j]) ? [] : [j]));
  const differences = await differenceColumns(residuals, scaled, at, steps, signal, missing);
  return parameters.map((_, j) => {
    const column = slopes.columns[j];
    if (!column || missing.includes(j)) return differences[missing.indexOf(j)];
    const reach = reaches[j];
    const [ahead, behind] = [reach, -reach].map((by) => likelihood.residuals(slopes.maps.map((map, k) => map.map((value, p) => value + by * column[k][p]))));
    const data = ahead.map((value, k) => (value - behind[k]) / (2 * step));
    return joined(data, priorColumn(parameters, j, priors));
  });
}

/** Normal priors add one residual each, its parameter's own scaled value. */
function priorColumn(parameters: readonly FreeParameter[], j: number, count: number): Float64Array {
  const column = new Float64Array(count);
  const normal = (parameter: FreeParameter): boolean => parameter.prior.kind === 'normal';
  if (normal(parameters[j])) column[parameters.slice(0, j).filter(normal).length] = 1;
  return column;
}

function joined(first: Float64Array, second: Float64Array): Float64Array {
  const all = new Float64Array(first.length + second.length);
  all.set(first);
  all.set(second, first.length);
  return all;
}
