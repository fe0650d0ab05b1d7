import { freeFreeOpacity } from '../ray/free-free.ts';
import { sceneValues } from '../ray/integrand.ts';
import { shapeEntries } from '../scene/shape.ts';
import type { Component, Scene } from '../scene/types.ts';
import { convertQuantity, formatQuantity } from '../units/quantity.ts';

/** What `check` says of a component's arms, flare, hole and clumps. */
export function shapeLines(component: Component): string[] {
  const law = component.flare ? [`    flare.law = ${component.flare.law}`] : [];
  const numbers = shapeEntries.flatMap(({ key, limits, internalUnit, meaning, read }) => {
    const value = read(component);
    if (value === undefined) return [];
    return [`    ${key} = ${formatQuantity(convertQuantity(value, internalUnit, limits.unit), limits.unit)} (allowed ${limits.min} to ${limits.max}): ${meaning}`];
  });
  return [...numbers, ...law];
}

/**
 * What `check` says of equipartition, a flux density to be scaled to, ordered random fields and
 * thermal gas. Throws InputError where a model that emits nothing is to be scaled.
 */
export function physicsLines(scene: Scene): string[] {
  const { cosmicRays, turbulence, freeFree } = scene;
  const { equipartition, scaleTo } = cosmicRays;
  const lines: string[] = [];
  if (equipartition) {
    const perSquare = sceneValues(scene, []).get('cosmicRays/equipartition') ?? 0;
    lines.push(`  cosmic rays: in equipartition with the whole field, ${equipartition.protonRatio} protons to an electron: C = ${perSquare.toExponential(3)} cm^-3 (B/uG)^2 (Beck & Krause 2005)`);
  }
  if (scaleTo) {
    const factor = sceneValues(scene, []).get('cosmicRays/scale') ?? 1;
    lines.push(`  cosmic rays: all layers times ${factor.toPrecision(4)}, so that the volume emits ${scaleTo.fluxJy} Jy at ${scaleTo.atHz / 1e9} GHz (synchrotron, before absorption and beam)`);
  }
  if (turbulence.ordered) {
    const { rmsUG, cellKpc, along, pitch } = turbulence.ordered;
    const direction = along === 'azimuth' ? 'the azimuth' : `a pitch of ${((pitch * 180) / Math.PI).toPrecision(4)} deg`;
    lines.push(`  ordered random field: ${rmsUG} uG along ${direction}, changing sign in cells of ${(1000 * cellKpc).toPrecision(3)} pc`);
  }
  if (freeFree) {
    const thick = 1 / freeFreeOpacity(freeFree.temperatureK, 1e9);
    lines.push(`  free-free: gas of ${freeFree.temperatureK} K; opaque at 1 GHz beyond an emission measure of ${thick.toExponential(1)} pc cm^-6 (Mezger & Henderson 1967)`);
  }
  return lines;
}
