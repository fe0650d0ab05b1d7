import { z } from 'zod';
import { cellsPerWave, correlationShare, meanComponent, unresolvedShare } from '../field/turbulence-spectrum.ts';
import type { TurbulenceDraw } from '../field/turbulence.ts';
import { buildFormula } from '../formula/build.ts';
import { Graph } from '../formula/graph.ts';
import { coordinatesOf } from '../formula/vector-calculus.ts';
import { InputError, nearestHint } from '../units/input-error.ts';
import { quoteValue } from '../units/quote.ts';
import { keys, nameText, words } from '../units/schema.ts';
import { placeAt, type YamlInput } from '../units/yaml-input.ts';
import { limited, sceneLimits } from './limits.ts';
import { arcsecOf } from './observation.ts';
import { placed } from './section.ts';
import type { Component, Galaxy, Observation, ResolvedTurbulence, Scene } from './types.ts';

const leastSlope = 3;
const fraction = /^\s*(\d+(?:\.\d+)?)\s*\/\s*(\d+(?:\.\d+)?)\s*$/;
const slope = z.union([z.number(), z.string()], { error: ({ input }) => `${quoteValue(input)} is given where a number or a fraction such as 11/3 is wanted` }).transform((given, context) => {
  const parts = typeof given === 'string' ? fraction.exec(given) : undefined;
  const value = typeof given === 'number' ? given : parts ? Number(parts[1]) / Number(parts[2]) : NaN;
  if (value > leastSlope && value <= 8) return value;
  const reason = value <= leastSlope ? 'fields of such spectra have no finite rms at short wavelengths' : 'a number or a fraction such as 11/3 is wanted';
  context.issues.push({ code: 'custom', message: `${quoteValue(given)} is not allowed, slope is above ${leastSlope} and at most 8: ${reason}`, input: given });
  return z.NEVER;
}).meta({ description: 'of the three-dimensional power spectrum, k^-slope; Kolmogorov 11/3' });
const cellCounts = [16, 32, 64, 128, 256] as const;

/** `turbulence.resolved` of a scene file. */
export const resolvedSchema = keys({
  rms: limited(sceneLimits.resolvedRms),
  outerScale: limited(sceneLimits.outerScale),
  slope: slope.default(11 / 3),
  box: limited(sceneLimits.turbulenceBox),
  cells: z.literal(cellCounts, { error: ({ input }) => `${input === undefined ? 'is missing' : `${quoteValue(input)} is not allowed`}: cells along a side of the box are ${cellCounts.join(', ')}` }),
  smallest: limited(sceneLimits.smallestWave).optional(),
  verticalRatio: limited(sceneLimits.verticalRatio).default(1),
  follows: nameText().optional(),
  profile: words('a formula').optional(),
  electrons: keys({ rms: limited(sceneLimits.electronRms), correlation: limited(sceneLimits.electronCorrelation).default(0) }).optional(),
  realisation: limited(sceneLimits.realisation).default(0),
});

type ResolvedFile = z.output<typeof resolvedSchema>;

/** Longest over shortest wave that a grid must carry at least: less is better left unresolved. */
const leastRange = 1.5;

/**
 * Checks `turbulence.resolved`. Structure below `smallest` (two pixels where it is not given) or
 * three cells goes to the unresolved terms. Throws InputError at the place of what is wrong.
 */
export function readResolved(input: YamlInput, file: ResolvedFile | undefined, components: readonly Component[], galaxy: Galaxy, { image }: Observation): { readonly resolved?: ResolvedTurbulence } {
  if (!file) return {};
  const fail = (key: string, reason: string): never => {
    throw new InputError(`turbulence.resolved.${key}: ${reason}`, placeAt(input, ['turbulence', 'resolved', key]));
  };
  const { rms, outerScale, box, cells, verticalRatio, follows, profile, electrons, realisation } = file;
  if (outerScale > box) fail('outerScale', `the outer scale, ${outerScale} kpc, is larger than the box of ${box} kpc, which can hold no such wave`);
  if (follows !== undefined && profile !== undefined) fail('profile', 'it is given beside "follows": one of the two says where turbulence is strong');
  if (follows !== undefined) checkFollows(follows, components, (reason) => fail('follows', reason));
  if (profile !== undefined) tryProfile(input, profile);
  const pixelKpc = (image.pixelArcsec * galaxy.distanceKpc) / arcsecOf(1, 1);
  const smallestKpc = file.smallest ?? 2 * pixelKpc;
  const carried = Math.max(smallestKpc, (cellsPerWave * box) / cells);
  if (outerScale < leastRange * carried) {
    const cause = carried > smallestKpc
      ? `the grid of ${cells} cells in ${box} kpc carries waves from ${carried.toPrecision(3)} kpc, ${cellsPerWave} cells: more cells, a smaller box`
      : file.smallest === undefined
        ? `two pixels of the image are ${carried.toPrecision(3)} kpc: smaller pixels`
        : `"smallest" is ${carried.toPrecision(3)} kpc: less of it`;
    fail('outerScale', `the spectrum from ${outerScale} kpc down cannot be resolved, for ${cause}, or "unresolved" in place of "resolved"`);
  }
  return {
    resolved: {
      rmsUG: rms, outerScaleKpc: outerScale, slope: file.slope, boxKpc: box, cells, smallestKpc, verticalRatio, realisation,
      ...(follows !== undefined && { follows }),
      ...(profile !== undefined && { profile }),
      ...(electrons && { electrons }),
    },
  };
}

function checkFollows(follows: string, components: readonly Component[], fail: (reason: string) => never): void {
  const names = components.map(({ name }) => name);
  const found = components.filter(({ name }) => name === follows);
  if (found.length === 0) fail(`nothing is named "${follows}"${nearestHint(follows, names)}; there are ${names.join(', ')}`);
  if (found.length > 1) fail(`"${follows}" fits ${found.length} components: give them different names`);
  const amplitude = ['strength', 'density'].find((name) => Object.hasOwn(found[0].parameters, name));
  if (amplitude === undefined) fail(`"${follows}" has neither "strength" nor "density" to divide by`);
  else if (found[0].parameters[amplitude] === 0) fail(`the ${amplitude} of "${follows}" is 0 and cannot be divided by`);
}

function tryProfile(input: YamlInput, text: string): void {
  const graph = new Graph();
  placed(input, ['turbulence', 'resolved', 'profile'], () => buildFormula(graph, text, new Map(Object.entries(coordinatesOf(graph)))));
}

/** How the variance of a turbulent field is split at the shortest wave that is resolved. */
export interface TurbulenceSplit {
  readonly draw: TurbulenceDraw;
  /** rms along x and y of what is resolved, uG. */
  readonly resolvedUG: number;
  /** rms of one component of the rest, taken as isotropic, uG, and the size of its cells, kpc. */
  readonly restUG: number;
  readonly restCellKpc: number;
  /** Share of the variance that is not resolved. */
  readonly share: number;
  readonly shortestKpc: number;
}

/**
 * Splits resolved turbulence at a wavenumber: waves down to 3 cells, or `smallest`, are drawn; the
 * rest, a share (shortest/outer)^(slope - 3) of the variance, goes to the unresolved terms of
 * physics.md section 3 with the correlation length of a spectrum that begins there. The total rms stays.
 */
export function splitTurbulence(resolved: ResolvedTurbulence, seed: number): TurbulenceSplit {
  const { rmsUG, outerScaleKpc, slope, boxKpc, cells, smallestKpc, verticalRatio, electrons, realisation } = resolved;
  const shortestKpc = Math.max(smallestKpc, (cellsPerWave * boxKpc) / cells);
  const draw: TurbulenceDraw = {
    seed, realisation, cells, slope, verticalRatio,
    first: boxKpc / outerScaleKpc,
    last: boxKpc / shortestKpc,
    ...(electrons && { electronCorrelation: electrons.correlation }),
  };
  const share = Math.min(1, unresolvedShare(draw));
  return {
    draw,
    share,
    shortestKpc,
    resolvedUG: rmsUG * Math.sqrt(1 - share),
    restUG: rmsUG * Math.sqrt(share) * meanComponent(verticalRatio),
    restCellKpc: correlationShare(slope) * shortestKpc,
  };
}

/** The split of a scene's turbulence; undefined where none is resolved. */
export function findSplit({ turbulence, numerics }: Pick<Scene, 'turbulence' | 'numerics'>): TurbulenceSplit | undefined {
  return turbulence.resolved && splitTurbulence(turbulence.resolved, numerics.seed);
}
