import type { JSX } from 'preact';
import { useState } from 'preact/hooks';
import { modelLibrary } from '../../model/library.ts';
import type { Model } from '../../model/types.ts';
import { scenePath, scenePaths } from '../../scene/paths.ts';
import type { Component, Scene } from '../../scene/types.ts';
import { addComponent, dropComponent, setPath } from '../document/scene-edits.ts';
import { changeColumn } from '../document/edits.ts';
import { findColumn, type PageColumn } from '../document/page-document.ts';
import { readScene } from '../document/read-scene.ts';
import type { Store } from '../store.ts';
import { Knob } from './knob.tsx';
import { SceneText } from './scene-text.tsx';
import { StudyText } from './study-text.tsx';

/** A part of a scene whose knobs stand together. */
interface Part {
  readonly key: string;
  readonly title: string;
  /** Beginnings of the paths that belong to it. */
  readonly starts: readonly string[];
}

const parts: readonly Part[] = [
  { key: 'galaxy', title: 'galaxy', starts: ['galaxy.'] },
  { key: 'field', title: 'field', starts: ['field.'] },
  { key: 'thermalElectrons', title: 'gas', starts: ['thermalElectrons.', 'freeFree.'] },
  { key: 'cosmicRays', title: 'electrons', starts: ['cosmicRays.'] },
  { key: 'turbulence', title: 'turbulence', starts: ['turbulence.'] },
  { key: 'telescope', title: 'telescope', starts: ['observation.', 'numerics.'] },
];

/** The knobs of the chosen column, made from its scene and the model files; or its scene as text. */
export function Knobs({ store }: { readonly store: Store }): JSX.Element | null {
  const [open, setOpen] = useState('field');
  const page = store.page.value;
  const column = findColumn(page, page.chosen);
  if (!column) return null;
  const { scene } = readScene(column.scene, column.name, store.files.value);
  return (
    <section class="knobs" aria-label={`Knobs of ${column.name}`}>
      <div class="tabs" role="tablist" aria-label="Parts of the scene">
        <span class="of">{column.name}</span>
        {[...parts.map(({ key, title }) => ({ key, title })), { key: 'text', title: 'as text' }, { key: 'observation', title: 'observation' }].map(({ key, title }) => (
          <button key={key} type="button" role="tab" id={`tab-${key}`} aria-selected={open === key} aria-controls="knob-panel" onClick={() => setOpen(key)}>
            {title}
          </button>
        ))}
      </div>
      <div id="knob-panel" role="tabpanel" aria-labelledby={`tab-${open}`} class="panel">
        {open === 'observation' ? (
          <StudyText store={store} />
        ) : open === 'text' || !scene ? (
          <SceneText store={store} column={column} />
        ) : (
          <PartKnobs store={store} column={column} scene={scene} part={parts.find(({ key }) => key === open) ?? parts[0]} />
        )}
      </div>
    </section>
  );
}

interface PartProps {
  readonly store: Store;
  readonly column: PageColumn;
  readonly scene: Scene;
  readonly part: Part;
}

function PartKnobs({ store, column, scene, part }: PartProps): JSX.Element {
  const paths = scenePaths(scene).filter((path) => part.starts.some((start) => path.startsWith(start)));
  const components = componentsOf(scene, part.key);
  const loose = paths.filter((path) => !components.some(({ name }) => path.startsWith(`${part.key}.${name}.`)));
  return (
    <div class="part">
      {components.map((component) => (
        <fieldset key={component.name}>
          <legend title={`${component.model.meaning} Source: ${component.model.source}`}>
            {component.name}
            {component.model.name !== component.name && <span class="soft"> {component.model.title}</span>}
          </legend>
          {paths
            .filter((path) => path.startsWith(`${part.key}.${component.name}.`))
            .map((path) => (
              <Knob key={`${column.id} ${path}`} store={store} column={column} target={scenePath(scene, path)} label={path.slice(part.key.length + component.name.length + 2)} source={component.model.source} />
            ))}
          <Choices store={store} column={column} component={component} section={part.key} />
          <button
            type="button"
            class="plain quiet"
            onClick={() => change(store, column, dropComponent(column.scene, part.key, component.name))}
          >
            take {component.name} away
          </button>
        </fieldset>
      ))}
      {loose.length > 0 && (
        <fieldset>
          <legend>{part.title}</legend>
          {loose.map((path) => (
            <Knob key={`${column.id} ${path}`} store={store} column={column} target={scenePath(scene, path)} label={path.replace(/^[^.]*\./, '')} />
          ))}
        </fieldset>
      )}
      {isList(part.key) && <AddComponent store={store} column={column} section={part.key} scene={scene} />}
    </div>
  );
}

function isList(key: string): key is 'field' | 'thermalElectrons' | 'cosmicRays' {
  return key === 'field' || key === 'thermalElectrons' || key === 'cosmicRays';
}

function componentsOf(scene: Scene, key: string): readonly Component[] {
  if (key === 'field') return scene.field;
  if (key === 'thermalElectrons') return scene.thermalElectrons;
  return key === 'cosmicRays' ? scene.cosmicRays.layers : [];
}

function change(store: Store, column: PageColumn, scene: string): void {
  store.edit(changeColumn(column.id, { scene }));
}

interface ChoicesProps {
  readonly store: Store;
  readonly column: PageColumn;
  readonly component: Component;
  readonly section: string;
}

/** Words that a model lets one choose between, such as a parity. */
function Choices({ store, column, component, section }: ChoicesProps): JSX.Element {
  return (
    <>
      {component.model.choices.map((choice) => (
        <label key={choice.name} class="knob" title={choice.meaning}>
          <span class="knob-name">{choice.name}</span>
          <select
            value={component.choices[choice.name]}
            onChange={(event) => change(store, column, setPath(column.scene, `${section}.${component.name}.${choice.name}`, event.currentTarget.value))}
          >
            {Object.keys(choice.options).map((option) => (
              <option key={option} value={option}>
                {option}
              </option>
            ))}
          </select>
        </label>
      ))}
    </>
  );
}

interface AddProps {
  readonly store: Store;
  readonly column: PageColumn;
  readonly section: 'field' | 'thermalElectrons' | 'cosmicRays';
  readonly scene: Scene;
}

/** Adds a model of the library, or a formula of the user's own, with values to start from. */
function AddComponent({ store, column, section, scene }: AddProps): JSX.Element {
  const kind = section === 'field' ? 'field' : 'density';
  const models = [...modelLibrary().values()].filter((model: Model) => model.kind === kind);
  return (
    <label class="add-part">
      <span class="hidden">Add to {section}</span>
      <select
        aria-label={`Add to ${section}`}
        value=""
        onChange={(event) => {
          const name = event.currentTarget.value;
          event.currentTarget.value = '';
          if (name) change(store, column, addComponent(column.scene, section, name, componentsOf(scene, section).map((one) => one.name)));
        }}
      >
        <option value="">+ add …</option>
        {models.map(({ name, title }) => (
          <option key={name} value={name}>
            {title}
          </option>
        ))}
        <option value="formula">a formula of one’s own</option>
      </select>
    </label>
  );
}

