import type { FieldLine } from '../ray/field-lines.ts';
import { colourAt } from './palette.ts';
import { element, fixed, type Drawing } from './svg.ts';
import type { Theme } from './theme.ts';

/** How a galaxy lies and how far it reaches. */
export interface ShapePose {
  readonly inclination: number;
  readonly positionAngle: number;
  readonly radiusKpc: number;
  readonly heightKpc: number;
}

/** From where its shape is looked at: turned away from the observer's view, rad. */
export interface ShapeDirection {
  /** About the vertical of the picture. */
  readonly turn: number;
  /** About its horizontal. */
  readonly tilt: number;
  readonly colourBy: 'strength' | 'line-of-sight';
}

/** A stroke of one colour; points in px, x right, y down. */
export interface ShapeStroke {
  readonly points: readonly (readonly [number, number])[];
  /** CSS colour, or the role of one of the theme's. */
  readonly colour: string | 'rule' | 'soft';
  readonly width: number;
  /** Towards the viewer, kpc, of its middle. */
  readonly depthKpc: number;
}

type Vector = readonly [number, number, number];

/** Segments of a line that share a colour at most. */
const longestStroke = 8;
const colourSteps = 12;

/**
 * Field lines, the rim of the disc, the spin and the line of sight as strokes in a square of `size`
 * px, farthest first. Seen as the observer does where nothing is turned: north up, east left.
 */
export function shapeStrokes(lines: readonly FieldLine[], pose: ShapePose, direction: ShapeDirection, size: number): readonly ShapeStroke[] {
  const project = projection(pose, direction);
  const scale = size / (2.15 * Math.hypot(pose.radiusKpc, 0.35 * pose.heightKpc));
  const toPicture = (point: Vector): readonly [number, number] => {
    const [right, up] = project(point);
    return [size / 2 + scale * right, size / 2 - scale * up];
  };
  const colour = colouring(lines, pose, direction.colourBy);
  const strokes = lines.flatMap((line) => strokesOf(line, colour, toPicture, (point) => project(point)[2]));
  return [...frameStrokes(pose, direction, toPicture, project), ...strokes].sort((a, b) => a.depthKpc - b.depthKpc);
}

/** The same as a drawing. */
export function shapeDrawing(lines: readonly FieldLine[], pose: ShapePose, direction: ShapeDirection, size: number, theme: Theme): Drawing {
  const body = shapeStrokes(lines, pose, direction, size).map(({ points, colour, width }) =>
    element('path', {
      d: points.map(([x, y], k) => `${k ? 'L' : 'M'}${fixed(x, 1)},${fixed(y, 1)}`).join(''),
      fill: 'none',
      stroke: colour === 'rule' ? theme.rule : colour === 'soft' ? theme.soft : colour,
      'stroke-width': width,
      'stroke-linecap': 'round',
    }),
  );
  return { width: size, height: size, body: body.join('') };
}

/** Galaxy frame → right, up and towards the viewer, kpc (physics.md section 2). */
function projection({ inclination, positionAngle }: ShapePose, { turn, tilt }: ShapeDirection): (point: Vector) => Vector {
  const [si, ci] = [Math.sin(inclination), Math.cos(inclination)];
  const [sp, cp] = [Math.sin(positionAngle), Math.cos(positionAngle)];
  const [st, ct] = [Math.sin(turn), Math.cos(turn)];
  const [sl, cl] = [Math.sin(tilt), Math.cos(tilt)];
  return ([x, y, z]) => {
    const across = y * ci + z * si;
    const near = z * ci - y * si;
    const [north, west] = [x * cp - across * sp, -(x * sp + across * cp)];
    const [right, ahead] = [west * ct + near * st, near * ct - west * st];
    return [right, north * cl - ahead * sl, ahead * cl + north * sl];
  };
}

/** Colour of a point of a line. */
function colouring(lines: readonly FieldLine[], { inclination }: ShapePose, by: ShapeDirection['colourBy']): (line: FieldLine, k: number) => string {
  const css = (kind: 'intensity' | 'signed', t: number): string => `rgb(${colourAt(kind, Math.round(colourSteps * t) / colourSteps).join(',')})`;
  if (by === 'line-of-sight') {
    const [si, ci] = [Math.sin(inclination), Math.cos(inclination)];
    return ({ field, strengthUG }, k) => {
      const share = (field[3 * k + 2] * ci - field[3 * k + 1] * si) / (strengthUG[k] || 1);
      return css('signed', 0.5 + 0.5 * Math.sign(share) * Math.min(1, 0.35 + Math.abs(share)));
    };
  }
  const strengths = lines.flatMap(({ strengthUG }) => Array.from(strengthUG)).sort((a, b) => a - b);
  const [low, high] = [0.05, 0.98].map((share) => Math.log(strengths[Math.floor(share * (strengths.length - 1))] || 1e-3));
  return ({ strengthUG }, k) => css('intensity', Math.min(1, Math.max(0, (Math.log(strengthUG[k] || 1e-12) - low) / (high - low || 1))));
}

function strokesOf(
  line: FieldLine,
  colour: (line: FieldLine, k: number) => string,
  toPicture: (point: Vector) => readonly [number, number],
  depth: (point: Vector) => number,
): ShapeStroke[] {
  const count = line.strengthUG.length;
  const at = (k: number): Vector => [line.pointsKpc[3 * k], line.pointsKpc[3 * k + 1], line.pointsKpc[3 * k + 2]];
  const strokes: ShapeStroke[] = [];
  for (let from = 0; from < count - 1; ) {
    const tone = colour(line, from);
    let to = from + 1;
    while (to < count - 1 && to - from < longestStroke && colour(line, to) === tone) to++;
    const points = Array.from({ length: to - from + 1 }, (_, k) => toPicture(at(from + k)));
    strokes.push({ points, colour: tone, width: 1.3, depthKpc: depth(at((from + to) >> 1)) });
    from = to;
  }
  return strokes;
}

/** The rim of the disc, its line of nodes and, where the view is turned, the line of sight through the centre. */
function frameStrokes(
  pose: ShapePose,
  { turn, tilt }: ShapeDirection,
  toPicture: (point: Vector) => readonly [number, number],
  project: (point: Vector) => Vector,
): ShapeStroke[] {
  const { radiusKpc: R, heightKpc: H, inclination } = pose;
  const around = (radius: number, from: number, to: number): Vector[] =>
    Array.from({ length: 25 }, (_, k): Vector => {
      const azimuth = from + ((to - from) * k) / 24;
      return [radius * Math.cos(azimuth), radius * Math.sin(azimuth), 0];
    });
  const stroke = (points: readonly Vector[], colour: 'rule' | 'soft', width: number): ShapeStroke => ({
    points: points.map(toPicture),
    colour,
    width,
    depthKpc: project(points[points.length >> 1])[2],
  });
  const rims = [0, 1, 2, 3].map((k) => stroke(around(R, (k * Math.PI) / 2, ((k + 1) * Math.PI) / 2), 'soft', 0.9));
  const inner = [0, 1, 2, 3].map((k) => stroke(around(R / 2, (k * Math.PI) / 2, ((k + 1) * Math.PI) / 2), 'rule', 0.8));
  const spin = stroke([[0, 0, 0], [0, 0, 0.3 * H], [0, 0, 0.6 * H]], 'soft', 1.1);
  const isTurned = Math.abs(turn) + Math.abs(tilt) > 0.02;
  const reach = 1.1 * R;
  const sight = [-reach, 0, reach].map((s): Vector => [0, -s * Math.sin(inclination), s * Math.cos(inclination)]);
  return [...rims, ...inner, spin, ...(isTurned ? [stroke(sight, 'soft', 0.8)] : [])];
}
