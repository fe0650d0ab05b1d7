import { InputError } from '../units/input-error.ts';

export type SkySense = 'clockwise' | 'counter-clockwise';

/** What observers know of how a disc lies; angles in rad, position angles N through E. */
export interface OrientClues {
  /** Position angle of the receding half of the major axis. */
  readonly receding: number;
  /** Between the disc and the plane of the sky, 0 to 90 deg. */
  readonly tilt: number;
  /** Position angle of the near side, roughly. */
  readonly near?: number;
  /** How arms run outwards on the sky; arms are taken to trail (common practice). */
  readonly arms?: SkySense;
  /** How the disc turns on the sky. */
  readonly turns?: SkySense;
}

/** A disc's orientation in the convention of scenes. */
export interface FoundOrientation {
  /** Between spin and the direction to the observer, 0 to 180 deg, rad. */
  readonly inclination: number;
  readonly positionAngle: number;
  readonly turns: SkySense;
  /** Position angle of the near side, rad. */
  readonly nearSide: number;
}

/**
 * Inclination (0 to 180 deg) and position angle from observers' clues. A disc that turns
 * counter-clockwise on the sky has i < 90 deg and its near side at PA - 90 deg. Trailing arms run
 * outwards against the turning. Throws InputError where no clue tells the sense, or two disagree.
 */
export function orientationOf({ receding, tilt, near, arms, turns }: OrientClues): FoundOrientation {
  const degree = Math.PI / 180;
  if (!(tilt >= 0 && tilt <= 90 * degree)) {
    throw new InputError(`${(tilt / degree).toPrecision(4)} deg is given; allowed is 0 to 90 deg, the angle between the disc and the plane of the sky`, { flag: '--inclination' });
  }
  const clues: [string, SkySense][] = [];
  if (turns) clues.push(['--turns', turns]);
  if (arms) clues.push(['--arms', arms === 'clockwise' ? 'counter-clockwise' : 'clockwise']);
  if (near !== undefined) clues.push(['--near', senseFromNearSide(receding, near)]);
  if (clues.length === 0) throw new InputError('the sense of rotation is not known: give --near, --arms or --turns');
  const [[first, sense]] = clues;
  const other = clues.find((clue) => clue[1] !== sense);
  if (other) throw new InputError(`${first} says the disc turns ${sense}, ${other[0]} says ${other[1]}; they cannot both hold for trailing arms`);
  const full = 2 * Math.PI;
  const positionAngle = ((receding % full) + full) % full;
  const isCounter = sense === 'counter-clockwise';
  const nearSide = (positionAngle + (isCounter ? -90 : 90) * degree + full) % full;
  return { inclination: isCounter ? tilt : Math.PI - tilt, positionAngle, turns: sense, nearSide };
}

function senseFromNearSide(receding: number, near: number): SkySense {
  const across = Math.sin(near - receding);
  if (Math.abs(across) < 0.1) throw new InputError('the near side lies along the major axis; give a position angle near the minor axis', { flag: '--near' });
  return across < 0 ? 'counter-clockwise' : 'clockwise';
}
