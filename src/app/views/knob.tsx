import type { JSX } from 'preact';
import { useState } from 'preact/hooks';
import { unitText } from '../../figure/number-text.ts';
import { parsePathValue, type ScenePath } from '../../scene/paths.ts';
import { InputError } from '../../units/input-error.ts';
import { convertQuantity, formatQuantity } from '../../units/quantity.ts';
import { changeColumn } from '../document/edits.ts';
import type { PageColumn } from '../document/page-document.ts';
import { readScene } from '../document/read-scene.ts';
import { setPath } from '../document/scene-edits.ts';
import type { Store } from '../store.ts';

interface KnobProps {
  readonly store: Store;
  readonly column: PageColumn;
  readonly target: ScenePath;
  readonly label: string;
  /** Of the model that the number belongs to. */
  readonly source?: string;
}

const steps = 240;

/** One number of a scene: a slider over a sensible range, and the number itself with its unit. */
export function Knob({ store, column, target, label, source }: KnobProps): JSX.Element {
  const { path, unit, shownUnit, whole, meaning, range } = target;
  const shown = (value: number): number => convertQuantity(value, unit, shownUnit);
  const value = shown(target.get());
  const limits = [shown(range[0]), shown(range[1])] as const;
  const [span, setSpan] = useState(() => workingRange(value, limits));
  const [wrong, setWrong] = useState('');
  const put = (text: string, name?: string): void => store.edit(changeColumn(column.id, { scene: setPath(column.scene, path, text) }), name);
  const [low, high] = value < span[0] || value > span[1] ? workingRange(value, limits) : span;
  const id = `knob-${column.id}-${path}`;
  const slide = (next: number): void => {
    setWrong('');
    put(formatQuantity(whole ? Math.round(next) : Number(next.toPrecision(4)), shownUnit), `${column.id} ${path}`);
  };
  const type = (text: string): void => {
    const given = /[a-zµ°/]/i.test(text) || shownUnit === '' ? text.trim() : `${text.trim()} ${shownUnit}`;
    try {
      const { scene } = readScene(column.scene, column.name, store.files.peek());
      if (scene) parsePathValue(target, scene, shownUnit === '' ? Number(given) : given);
      setWrong('');
      put(given);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      setWrong(error.reason);
    }
  };
  const range_ = `${formatQuantity(limits[0], '')} to ${formatQuantity(limits[1], shownUnit)}`;
  return (
    <div class="knob" title={`${meaning}\nAllowed: ${range_}${source ? `\nSource: ${source}` : ''}`}>
      <label class="knob-name" for={id}>
        {label}
      </label>
      <input
        type="range"
        aria-label={`${label}, slider`}
        min={low}
        max={high}
        step={whole ? 1 : (high - low) / steps}
        value={value}
        onPointerDown={() => setSpan(workingRange(value, limits))}
        onInput={(event) => slide(Number(event.currentTarget.value))}
        onChange={store.settle}
      />
      <input
        id={id}
        class="number"
        type="text"
        inputMode="decimal"
        aria-invalid={wrong !== ''}
        aria-describedby={wrong ? `${id}-wrong` : undefined}
        value={formatQuantity(Number(value.toPrecision(6)), '')}
        onChange={(event) => type(event.currentTarget.value)}
      />
      <span class="unit">{unitText(shownUnit)}</span>
      {wrong && (
        <span class="trouble" id={`${id}-wrong`} role="alert">
          {wrong}
        </span>
      )}
    </div>
  );
}

/** All that is allowed where that is a handful of times the value or a turn; else some way around the value. */
function workingRange(value: number, [low, high]: readonly [number, number]): readonly [number, number] {
  const size = Math.abs(value);
  if (high - low <= 400 || high <= 8 * size) return [low, high];
  if (size === 0) return [Math.max(low, -10), Math.min(high, 10)];
  return low >= 0 ? [low > 0 ? Math.max(low, value / 10) : 0, Math.min(high, 4 * value)] : [Math.max(low, -3 * size), Math.min(high, 3 * size)];
}
