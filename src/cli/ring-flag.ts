import { defaultRing, type Ring } from '../measure/ring-profile.ts';
import type { Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import { parseQuantity } from '../units/quantity.ts';

/** The ring that `--ring "4 kpc,7 kpc"` asks for, or the one that suits the scene's volume. */
export function ringOf(flag: string | undefined, scene: Scene): Ring {
  const usual = defaultRing(scene.galaxy.volume.radiusKpc);
  if (flag === undefined) return usual;
  const place = { flag: `--ring ${flag}` };
  const parts = flag.split(',');
  if (parts.length !== 2) throw new InputError('expected two radii, such as "4 kpc,7 kpc"', place);
  const [innerKpc, outerKpc] = parts.map((part) => {
    try {
      return parseQuantity(part.trim(), 'kpc');
    } catch (error) {
      throw error instanceof InputError ? error.at(place) : error;
    }
  });
  if (!(innerKpc >= 0 && outerKpc > innerKpc)) throw new InputError('the outer radius must be larger than the inner one, and none negative', place);
  return { ...usual, innerKpc, outerKpc };
}
