import { buildFormula } from '../../formula/build.ts';
import { Graph, type NodeId } from '../../formula/graph.ts';
import { compileJavaScript } from '../../formula/javascript.ts';
import { lowerGraph } from '../../formula/lower.ts';
import { InputError } from '../../units/input-error.ts';
import { convertQuantity, parseQuantity } from '../../units/quantity.ts';
import { parseUnit } from '../../units/unit.ts';
import type { Profile } from './profiles.ts';

/** What a formula of the dynamo's file may name beside r and z. */
export interface ProfileScope {
  readonly constants: Readonly<Record<string, number>>;
  /** Formulas, each of those before it. */
  readonly define: Readonly<Record<string, string>>;
  /** km/s/kpc; undefined for formulas of the rotation itself. */
  readonly angularSpeed?: Profile;
}

/**
 * A quantity ("6 uG", in `unit`) or a formula (its value in `unit`) as a profile. Throws InputError without
 * a place, FormulaError for formulas.
 */
export function makeProfile(text: string | number, unit: string, scope: ProfileScope): Profile {
  if (typeof text === 'string' && /^\s*[+-]?[\d.]+(e[+-]?\d+)?\s+[A-Za-z]/i.test(text)) {
    const value = parseQuantity(text, unit);
    return () => value;
  }
  if (text === 0) return () => 0;
  if (typeof text === 'number') throw new InputError(`${text} has no unit: a quantity such as "2 ${unit}", or a formula, is wanted`);
  return compileProfile(text, scope);
}

/** A formula as a profile. Throws FormulaError. */
export function compileProfile(text: string, { constants, define, angularSpeed }: ProfileScope): Profile {
  const graph = new Graph();
  const lanes = ['r', 'z', ...(angularSpeed ? ['Omega', 'shear'] : [])];
  const scope = new Map<string, NodeId>(lanes.map((name) => [name, graph.variable(name)]));
  for (const [name, value] of Object.entries(constants)) scope.set(name, graph.constant(value));
  for (const [name, formula] of Object.entries(define)) scope.set(name, buildFormula(graph, formula, scope));
  const kernel = compileJavaScript(lowerGraph(graph, [buildFormula(graph, text, scope)], lanes));
  const inputs = lanes.map(() => new Float64Array(1));
  const output = new Float64Array(1);
  const none = new Float64Array(0);
  return (r, z) => {
    inputs[0][0] = r;
    inputs[1][0] = z;
    if (angularSpeed) {
      inputs[2][0] = angularSpeed(r, z);
      inputs[3][0] = shearOf(angularSpeed, r, z);
    }
    kernel.evaluate(1, none, inputs, [output], []);
    return output[0];
  };
}

/** r dOmega/dr by central differences. */
function shearOf(angularSpeed: Profile, r: number, z: number): number {
  const step = 1e-4 * r;
  return step === 0 ? 0 : (r * (angularSpeed(r + step, z) - angularSpeed(r - step, z))) / (2 * step);
}

/**
 * A parameter's number as the dynamo's formulas see it: lengths in kpc, times in kpc s/km, so that speeds
 * are in km/s and diffusivities in kpc km/s; fields in uG, angles in rad. Throws InputError without a place.
 */
export function parameterValue(text: string | number): number {
  if (typeof text === 'number') return text;
  const trimmed = text.trim();
  const unitText = /^[+-]?[\d.]+(?:e[+-]?\d+)?\s*(.*)$/is.exec(trimmed)?.[1] ?? '';
  if (unitText === '') return parseQuantity(trimmed, '');
  const powers = parseUnit(unitText).dimensions;
  const [length, time, field, angle] = (['length', 'time', 'field', 'angle'] as const).map((dimension) => powers.get(dimension) ?? 0);
  const factors = [['kpc', length + time], ['km', -time], ['s', time], ['uG', field], ['rad', angle]] as const;
  const unit = factors.filter(([, power]) => power !== 0).map(([word, power]) => `${word}^${power}`).join(' ');
  const known = [length, time, field, angle].filter((power) => power !== 0).length;
  if (known < powers.size) throw new InputError(`"${text}" is given where a quantity made of lengths, times, fields and angles is wanted`);
  return convertQuantity(parseQuantity(trimmed, unitText), unitText, unit);
}
