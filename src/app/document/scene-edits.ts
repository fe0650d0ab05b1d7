import { isMap, isSeq, parseDocument, type Document, type YAMLSeq } from 'yaml';
import { getModel } from '../../model/library.ts';
import { sceneText } from '../../scene/parse-scene.ts';

/** A scene's text with one value changed, comments and order kept. */
export function setPath(text: string, path: string, value: string): string {
  return sceneText(text, 'scene', [{ path, value, flag: path }]);
}

type Section = 'field' | 'thermalElectrons' | 'cosmicRays';

/** The text with a component of a model added, with the values of the model's first check to start from. */
export function addComponent(text: string, section: Section, model: string, taken: readonly string[]): string {
  const document = parseDocument(text);
  const name = freeComponentName(model, taken);
  const component = model === 'formula' ? formulaComponent(name, section) : modelComponent(name, section, model);
  const node = document.createNode(component, { flow: model !== 'formula' });
  const list = listOf(document, section);
  if (list) list.add(node);
  else document.setIn(pathOf(section), document.createNode([component]));
  return document.toString({ lineWidth: 0 });
}

/** The text without a component. */
export function dropComponent(text: string, section: string, name: string): string {
  const document = parseDocument(text);
  const list = listOf(document, section);
  const index = list?.items.findIndex((item) => isMap(item) && String(item.get('name') ?? item.get('model')) === name) ?? -1;
  if (list && index >= 0) list.delete(index);
  return document.toString({ lineWidth: 0 });
}

function pathOf(section: string): readonly string[] {
  return section === 'cosmicRays' ? ['cosmicRays', 'layers'] : [section];
}

function listOf(document: Document, section: string): YAMLSeq | undefined {
  const node = document.getIn(pathOf(section), true);
  return isSeq(node) ? node : undefined;
}

function freeComponentName(model: string, taken: readonly string[]): string {
  for (let k = 1; ; k++) {
    const name = k === 1 ? model : `${model} ${k}`;
    if (!taken.includes(name)) return name;
  }
}

function modelComponent(name: string, section: Section, modelName: string): Record<string, unknown> {
  const model = getModel(modelName);
  const [check] = model.checks;
  const values = Object.fromEntries(
    model.parameters
      .filter((parameter) => check?.parameters[parameter.name] !== undefined && (parameter.group === undefined || check.parameters[parameter.name] !== undefined))
      .map((parameter) => [section === 'cosmicRays' && parameter.name === 'density' ? 'normalisation' : parameter.name, check.parameters[parameter.name]]),
  );
  if (section === 'cosmicRays' && 'normalisation' in values) values.normalisation = '1e-5 cm^-3';
  return { model: modelName, ...(name !== modelName && { name }), ...values };
}

/** A formula to begin with: a toroidal field, or a flat disc. */
function formulaComponent(name: string, section: Section): Record<string, unknown> {
  const isField = section === 'field';
  return {
    model: 'formula',
    name,
    parameters: isField ? { S: '2 uG', R: '6 kpc' } : { S: section === 'cosmicRays' ? '1e-5 cm^-3' : '0.02 cm^-3', R: '6 kpc', h: '1 kpc' },
    ...(isField ? { field: { phi: 'S * exp(-r/R) * (1 - exp(-r^2)) * exp(-z^2)' } } : { density: 'S * exp(-r/R) * sech(z/h)^2' }),
  };
}
