import { InputError } from '../../units/input-error.ts';
import type { DynamoProfiles, Profile } from './profiles.ts';
import type { DynamoFile } from './spec-schema.ts';

/** Height at which the wind has half its speed, where a file leaves it out, kpc. */
const usualHeightKpc = 3;

/**
 * The wind of a file: speed·x^3/(1 + x^3), x = |z|/height, away from the plane (own definition: calm in
 * the disc, where a fast wind would carry the field off faster than it grows), straight up or along lines
 * from a point `apex` behind the plane; or formulas. Throws InputError where both are mixed.
 */
export function windProfiles(wind: DynamoFile['wind'], read: (key: 'radial' | 'vertical', text: string | number) => Profile): Pick<DynamoProfiles, 'windRadial' | 'windVertical'> {
  const { speed, height = usualHeightKpc, apex, radial, vertical } = wind;
  const hasFormulas = radial !== undefined || vertical !== undefined;
  if (hasFormulas && (speed ?? wind.height ?? apex) !== undefined) {
    throw new InputError('wind: either "speed" (with "height", "apex") or formulas "radial" and "vertical" are wanted, not both');
  }
  if (speed === undefined && (wind.height ?? apex) !== undefined) throw new InputError('wind: "height" and "apex" need "speed"');
  const none: Profile = () => 0;
  if (hasFormulas) return { windRadial: radial === undefined ? none : read('radial', radial), windVertical: vertical === undefined ? none : read('vertical', vertical) };
  if (speed === undefined || speed === 0) return { windRadial: none, windVertical: none };
  const size = (z: number): number => {
    const cube = Math.abs(z / height) ** 3;
    return (speed * cube) / (1 + cube);
  };
  if (apex === undefined) return { windRadial: none, windVertical: (_, z) => Math.sign(z) * size(z) };
  return {
    windRadial: (r, z) => (size(z) * r) / Math.hypot(r, Math.abs(z) + apex),
    windVertical: (r, z) => (Math.sign(z) * size(z) * (Math.abs(z) + apex)) / Math.hypot(r, Math.abs(z) + apex),
  };
}
