import type { Graph, NodeId } from './graph.ts';
import { differentiate } from './differentiate.ts';

/** The coordinates that formulas see; r, phi and x, y are separate leaves until lowering. */
export interface Coordinates {
  readonly x: NodeId;
  readonly y: NodeId;
  readonly z: NodeId;
  readonly r: NodeId;
  readonly phi: NodeId;
}

/** Three components as nodes. */
export type Vector = readonly [NodeId, NodeId, NodeId];

/** Distance from the axis below which r is held up, kpc: keeps 1/r finite on the axis itself. */
export const smallestRadiusKpc = 1e-12;

/** The leaves x, y, z, r, phi of a graph. */
export function coordinatesOf(graph: Graph): Coordinates {
  const [x, y, z, r, phi] = ['x', 'y', 'z', 'r', 'phi'].map((name) => graph.variable(name));
  return { x, y, z, r, phi };
}

/** What r and phi are in terms of x and y, for lowering: derivatives are taken before. */
export function coordinateSubstitution(graph: Graph): ReadonlyMap<NodeId, NodeId> {
  const { x, y, r, phi } = coordinatesOf(graph);
  const square = graph.add(graph.power(x, 2), graph.power(y, 2), graph.constant(smallestRadiusKpc ** 2));
  return new Map([
    [r, graph.power(square, 0.5)],
    [phi, graph.binary('atan2', y, x)],
  ]);
}

/** ∂f/∂r, ∂f/∂phi, ∂f/∂z in cylindrical coordinates, whatever leaves f is written in. */
function cylindricalGradient(graph: Graph, c: Coordinates, f: NodeId): { dr: NodeId; dphi: NodeId; dz: NodeId } {
  const [fx, fy, fz, fr, fphi] = [c.x, c.y, c.z, c.r, c.phi].map((leaf) => differentiate(graph, f, leaf));
  const dr = graph.add(fr, graph.divide(graph.multiply(fx, c.x), c.r), graph.divide(graph.multiply(fy, c.y), c.r));
  const dphi = graph.add(fphi, graph.multiply(fy, c.x), graph.negate(graph.multiply(fx, c.y)));
  return { dr, dphi, dz: fz };
}

/** Cylindrical components (r, phi, z) → Cartesian ones. */
export function cartesianFromCylindrical(graph: Graph, c: Coordinates, [vr, vphi, vz]: Vector): Vector {
  const cosine = graph.divide(c.x, c.r);
  const sine = graph.divide(c.y, c.r);
  return [
    graph.subtract(graph.multiply(vr, cosine), graph.multiply(vphi, sine)),
    graph.add(graph.multiply(vr, sine), graph.multiply(vphi, cosine)),
    vz,
  ];
}

/** B = ∇×A from cylindrical components of A, as Cartesian components. */
export function curlCylindrical(graph: Graph, c: Coordinates, [ar, aphi, az]: Vector): Vector {
  const [gr, gphi, gz] = [ar, aphi, az].map((part) => cylindricalGradient(graph, c, part));
  const over = graph.power(c.r, -1);
  const br = graph.subtract(graph.multiply(over, gz.dphi), gphi.dz);
  const bphi = graph.subtract(gr.dz, gz.dr);
  const bz = graph.add(gphi.dr, graph.multiply(over, aphi), graph.negate(graph.multiply(over, gr.dphi)));
  return cartesianFromCylindrical(graph, c, [br, bphi, bz]);
}

/** ∇f in Cartesian components, whatever leaves f is written in. */
export function gradient(graph: Graph, c: Coordinates, f: NodeId): Vector {
  const [fx, fy, fz, fr, fphi] = [c.x, c.y, c.z, c.r, c.phi].map((leaf) => differentiate(graph, f, leaf));
  const overR2 = graph.power(c.r, -2);
  return [
    graph.add(fx, graph.divide(graph.multiply(fr, c.x), c.r), graph.negate(graph.multiply(fphi, c.y, overR2))),
    graph.add(fy, graph.divide(graph.multiply(fr, c.y), c.r), graph.multiply(fphi, c.x, overR2)),
    fz,
  ];
}

/** B = ∇×A from Cartesian components of A. */
export function curlCartesian(graph: Graph, c: Coordinates, [ax, ay, az]: Vector): Vector {
  const [gx, gy, gz] = [ax, ay, az].map((part) => gradient(graph, c, part));
  return [graph.subtract(gz[1], gy[2]), graph.subtract(gx[2], gz[0]), graph.subtract(gy[0], gx[1])];
}

/** B = ∇a × ∇b (Euler potentials), Cartesian components. */
export function eulerField(graph: Graph, c: Coordinates, a: NodeId, b: NodeId): Vector {
  const [ax, ay, az] = gradient(graph, c, a);
  const [bx, by, bz] = gradient(graph, c, b);
  const minor = (p: NodeId, q: NodeId, s: NodeId, t: NodeId): NodeId => graph.subtract(graph.multiply(p, q), graph.multiply(s, t));
  return [minor(ay, bz, az, by), minor(az, bx, ax, bz), minor(ax, by, ay, bx)];
}

/** The Jacobian ∂B_i/∂x_j of a Cartesian field, row by row: for ∇·B and its norm. */
export function jacobian(graph: Graph, c: Coordinates, field: Vector): readonly Vector[] {
  return field.map((component) => gradient(graph, c, component));
}
