import { ModesNotFound } from '../field/dynamo/modes.ts';
import { NotSaturated } from '../field/dynamo/saturate.ts';
import { DynamoDecays, solveDynamo, type DynamoSolution } from '../field/dynamo/solve.ts';
import { factorisationBytes } from '../field/dynamo/problem.ts';
import { readDynamoSpec, type DynamoSpec } from '../field/dynamo/spec.ts';
import { thinDiscRate, type ThinDiscRate } from '../field/dynamo/thin-disc.ts';
import { bytesText } from '../field/grid-file.ts';
import type { Provenance } from '../files/fits-scene.ts';
import { filesBeside, readText } from '../files/node-io.ts';
import { readRotationCsv } from '../files/rotation-csv.ts';
import { applyOverrides } from '../scene/overrides.ts';
import { InputError } from '../units/input-error.ts';
import { readYaml } from '../units/yaml-input.ts';
import { convergenceProblem, rateText } from './dynamo-words.ts';
import { overridesOf, withCancel, type CommonFlags } from './run-context.ts';
import { version } from '../files/version.ts';

/** Most memory that the factors of a matrix may take. */
const mostFactorBytes = 4 * 2 ** 30;

/** A checked file of the dynamo, and the text that its field carries, the rotation curve's numbers within it. */
export function loadDynamo(path: string, flags: Pick<CommonFlags, 'set'>): { readonly spec: DynamoSpec; readonly provenance: Provenance } {
  const text = readText(path);
  const input = readYaml(text, path);
  applyOverrides(input, overridesOf(flags));
  const files = filesBeside(path);
  let curve: ReturnType<typeof readRotationCsv> | undefined;
  const spec = readDynamoSpec(input, (file) => (curve = readRotationCsv(files.text(file), file)));
  const bytes = factorisationBytes(spec.problem);
  if (bytes > mostFactorBytes) throw new InputError(`a grid of ${cellsText(spec)} cells needs up to ${bytesText(bytes)} of memory; at most ${bytesText(mostFactorBytes)} are allowed`, { file: path });
  // The field can be made again from its own file alone.
  if (curve) input.document.set('rotation', { radius: curve.radiiKpc.map((r) => `${r} kpc`), speed: curve.speedsKms.map((v) => `${v} km/s`) });
  const sceneText = curve || flags.set?.length ? input.document.toString({ lineWidth: 0 }) : text;
  return { spec, provenance: { sceneText, version, seed: 1 } };
}

/** Solves with progress; what is not to be believed is refused, with its numbers, as an InputError. */
export async function solveUnderWatch(spec: DynamoSpec, path: string, flags: CommonFlags): Promise<DynamoSolution> {
  const solution = await withCancel(flags, async ({ progress, signal }) => {
    const pause = async (what: string, done: number, total: number): Promise<void> => {
      progress.show(what, done, total);
      await new Promise((resolve) => setImmediate(resolve));
      signal.throwIfAborted();
    };
    try {
      return await solveDynamo(spec.problem, pause);
    } catch (error) {
      throw refusal(error, path) ?? error;
    }
  });
  const problem = convergenceProblem(spec, solution);
  if (problem !== undefined) throw new InputError(problem, { file: path });
  return solution;
}

/** Growth rates in the one-dimensional limit at the radii asked for. */
export function thinDiscRates({ problem, thinDisc }: DynamoSpec): readonly ThinDiscRate[] {
  if (!thinDisc) return [];
  return thinDisc.radiiKpc.flatMap((radius) => problem.parities.map((parity) => thinDiscRate(problem.profiles, radius, thinDisc.halfThicknessKpc, parity)));
}

function refusal(error: unknown, path: string): InputError | undefined {
  if (error instanceof DynamoDecays) {
    return new InputError(
      `every field decays, the slowest (${error.parity}) at ${rateText(error.growthRate)} per Gyr, so there is no saturated one; stronger alpha or shear, less diffusion or a slower wind would make it grow, and "solve: {state: mode}" gives the shape that decays slowest`,
      { file: path },
    );
  }
  if (error instanceof NotSaturated) return new InputError(`not converged: ${error.message}`, { file: path });
  if (error instanceof ModesNotFound) return new InputError(`not converged: ${error.message}; a finer grid, or fewer "modes", may help`, { file: path });
  return undefined;
}

function cellsText({ problem: { grid } }: DynamoSpec): string {
  return `${2 * grid.radialCells} x ${2 * grid.verticalCells}`;
}
