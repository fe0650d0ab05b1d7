import { randomPoints, probeScene, type Points, type Probe } from './probe.ts';
import type { Scene } from '../scene/types.ts';

/** Parity in z of a field: even (quadrupolar), odd (dipolar), or a mixture of both. */
export type Parity = 'even' | 'odd' | 'mixed';

/** What of a scene's symmetry decides which asymmetries it can make. */
export interface SceneSymmetry {
  /** Field and densities are the same at every azimuth. */
  readonly axisymmetric: boolean;
  readonly parity: Parity;
  /** Densities are the same above and below the plane. */
  readonly evenDensities: boolean;
  /** Whether unresolved turbulence damps the far side's polarization. */
  readonly damped: boolean;
  /** Whether thermal gas absorbs the far side. */
  readonly absorbed: boolean;
}

const testPoints = 48;
/** Parts of the field below this share of its size count as rounding. */
const rounding = 1e-9;
const turn = 1.2345;

/** Measures a scene's symmetry at seeded random points and their mirror images: formulas included. */
export function measureSymmetry(scene: Scene): SceneSymmetry {
  const points = randomPoints(scene, testPoints);
  const here = probeScene(scene, points);
  const below = probeScene(scene, { ...points, z: points.z.map((z) => -z) });
  const turned = probeScene(scene, rotated(points, turn));
  const [c, s] = [Math.cos(turn), Math.sin(turn)];
  const same = (a: (k: number) => readonly number[], b: (k: number) => readonly number[]): boolean => {
    let [size, difference] = [0, 0];
    for (let k = 0; k < testPoints; k++) {
      const [left, right] = [a(k), b(k)];
      size = Math.max(size, Math.hypot(...left));
      difference = Math.max(difference, Math.hypot(...left.map((value, axis) => value - right[axis])));
    }
    return difference <= rounding * size;
  };
  const field = (probe: Probe) => (k: number) => [probe.Bx[k], probe.By[k], probe.Bz[k]];
  const density = (column: 'ne' | 'C') => (probe: Probe) => (k: number) => [probe[column][k]];
  const isEven = same(field(here), (k) => [below.Bx[k], below.By[k], -below.Bz[k]]);
  const isOdd = same(field(here), (k) => [-below.Bx[k], -below.By[k], below.Bz[k]]);
  const fieldTurns = same(field(turned), (k) => [c * here.Bx[k] - s * here.By[k], s * here.Bx[k] + c * here.By[k], here.Bz[k]]);
  const columns = [density('ne'), density('C')];
  return {
    axisymmetric: fieldTurns && columns.every((column) => same(column(here), column(turned))),
    parity: isEven ? 'even' : isOdd ? 'odd' : 'mixed',
    evenDensities: columns.every((column) => same(column(here), column(below))),
    damped: [scene.turbulence.unresolved, scene.turbulence.ordered, scene.turbulence.resolved].some((part) => (part?.rmsUG ?? 0) > 0),
    absorbed: scene.freeFree !== undefined && scene.thermalElectrons.length > 0,
  };
}

/**
 * What a scene's symmetry forbids before the beam, and what the beam alone makes of it, in plain
 * sentences (design/physics.md section 8, derived there).
 */
export function symmetrySentences(scene: Scene): readonly string[] {
  const symmetry = measureSymmetry(scene);
  if (!symmetry.axisymmetric) return ['Not axisymmetric: symmetry forbids no asymmetry.'];
  const isFaceOn = Math.abs(Math.sin(scene.galaxy.inclination)) < 1e-12;
  const faceOn = isFaceOn ? ['Axisymmetric and seen face-on: no azimuthal structure in I, |P| or RM; the polarization angle turns with the azimuth.'] : [];
  return [...faceOn, oppositePoints(symmetry)];
}

function oppositePoints({ parity, evenDensities, damped, absorbed }: SceneSymmetry): string {
  if (!evenDensities) return 'Axisymmetric, with densities that differ above and below the plane: symmetry forbids no odd asymmetry.';
  if (parity === 'odd') return 'Axisymmetric and odd in z: an odd asymmetry of |P| (approaching against receding, near against far) arises without damping and stays at short wavelengths.';
  if (parity === 'mixed') return 'Axisymmetric with even and odd parts: no exact symmetry between opposite points.';
  if (damped || absorbed) {
    const causes = [...(damped ? ['damped by unresolved turbulence'] : []), ...(absorbed ? ['absorbed by thermal gas'] : [])].join(' and ');
    return `Axisymmetric and even in z, ${causes}: an odd asymmetry of |P| can arise at long wavelengths, where the far side is lost, and vanishes at short ones.${absorbed ? ' Absorption dims I and |P| of the far side alike.' : ''}`;
  }
  return (
    'Axisymmetric and even in z, without damping: before the beam, |P| and I are equal at opposite points at every wavelength, so no odd asymmetry; ' +
    'the beam alone can make one at long wavelengths, by averaging over the gradient of the phase 2λ²R between the two sides, and so can wide channels.'
  );
}

function rotated({ x, y, z }: Points, angle: number): Points {
  const [c, s] = [Math.cos(angle), Math.sin(angle)];
  return { x: x.map((value, k) => c * value - s * y[k]), y: x.map((value, k) => s * value + c * y[k]), z };
}
