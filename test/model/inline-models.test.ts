import { expect, test } from 'vitest';
import { modelLibrary } from '../../src/model/library.ts';
import type { Model, ModelCheck } from '../../src/model/types.ts';
import { probeScene, randomPoints, type Probe } from '../../src/ray/probe.ts';
import { sceneOf } from '../ray/scenes.ts';

const models = [...modelLibrary().values()];

/** A library model as a scene would name it, with the parameters of a check. */
function byName(model: Model, check: ModelCheck): string {
  const parameters = Object.entries(check.parameters).map(([name, value]) => `${name}: ${value}`);
  return `{model: ${model.name}, name: it, ${parameters.join(', ')}}`;
}

/** The same model with its formulas written into the scene. */
function written(model: Model, check: ModelCheck): string {
  const clean = (name: string): string => (model.name === 'uniform' ? `b${name}` : name);
  const given = model.parameters.map(({ name, unit, default: usual }) => `${clean(name)}: ${JSON.stringify(check.parameters[name] ?? `${usual ?? 0} ${unit}`)}`);
  const options = model.choices.flatMap((choice) => [
    ...Object.entries(choice.options),
    [choice.name, choice.options[String(check.parameters[choice.name] ?? choice.default)]] as const,
  ]);
  const define = [...options.map(([name, value]) => `${name}: "${value}"`), ...Object.entries(model.define).map(([name, text]) => `${name}: "${text}"`)];
  const { potential, euler, field, density } = model.formulas;
  const named = (formulas: Readonly<Record<string, string>>): string => `{${Object.entries(formulas).map(([key, text]) => `${key}: "${model.name === 'uniform' ? clean(text) : text}"`).join(', ')}}`;
  const parts = [
    ...(potential ? [`potential: ${named(potential)}`] : []),
    ...(euler ? [`euler: ${named({ ...euler })}`] : []),
    ...(field ? [`field: ${named(field)}`] : []),
    ...(density === undefined ? [] : [`density: "${density}"`]),
  ];
  return `{model: formula, name: it, parameters: {${given.join(', ')}}, define: {${define.join(', ')}}, ${parts.join(', ')}}`;
}

function probe(model: Model, component: string): Probe {
  const uniform = '{model: uniform, x: 1 uG, y: 0 uG, z: 0 uG}';
  const disc = '{model: exponential-disc, name: c, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1 kpc}';
  const scene = model.kind === 'field' ? sceneOf({ field: [component], layers: [disc] }) : sceneOf({ field: [uniform], electrons: [component], layers: [disc] });
  return probeScene(scene, randomPoints(scene, 50));
}

test.each(models.flatMap((model) => model.checks.map((check, k) => [`${model.name}, check ${k + 1}`, model, check] as const)))(
  'formulas written into a scene give what the library gives: %s',
  (_, model, check) => {
    const [library, inline] = [probe(model, byName(model, check)), probe(model, written(model, check))];
    for (const column of ['Bx', 'By', 'Bz', 'ne'] as const) {
      // The same graph from the same text, but constants are folded where options are.
      const largest = Math.max(...library[column].map(Math.abs));
      library[column].forEach((value, k) => expect(Math.abs(inline[column][k] - value)).toBeLessThanOrEqual(1e-13 * largest));
    }
  },
);

test('a potential, Euler potentials and components of one field agree', () => {
  // A_φ = q r/2 has B = q ẑ; so have a = q r²/2, b = φ and a = q x, b = y.
  const forms = ['potential: {phi: "q*r/2"}', 'euler: {a: "q*r^2/2", b: phi}', 'euler: {a: "q*x", b: y}', 'field: {z: q}', 'potential: {x: "-q*y/2", y: "q*x/2"}', 'field: {x: "0", y: "0", z: "q"}'];
  for (const form of forms) {
    const scene = sceneOf({ field: [`{model: formula, name: it, parameters: {q: 3 uG}, ${form}}`], layers: ['{model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1 kpc}'] });
    const { Bx, By, Bz, relativeDivergence } = probeScene(scene, randomPoints(scene, 40));
    for (let k = 0; k < 40; k++) {
      // Cartesian leaves and cylindrical ones cancel to rounding.
      expect(Math.hypot(Bx[k], By[k], Bz[k] - 3)).toBeLessThan(1e-13);
      expect(relativeDivergence[k]).toBe(0);
    }
  }
});

test('a monopole that a user writes is measured', () => {
  const scene = sceneOf({ field: ['{model: formula, name: it, parameters: {q: 1 uG/kpc}, field: {r: "q*r", z: "q*z"}}'], layers: ['{model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1 kpc}'] });
  const { divB, relativeDivergence } = probeScene(scene, randomPoints(scene, 20));
  for (let k = 0; k < 20; k++) {
    // B = q r: ∇·B = 3q, ‖∇B‖ = √3 q.
    expect(Math.abs(divB[k] - 3)).toBeLessThan(1e-13);
    expect(Math.abs(relativeDivergence[k] - Math.sqrt(3))).toBeLessThan(1e-13);
  }
});
