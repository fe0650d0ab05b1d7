import type { Program } from '../formula/lower.ts';
import { float as f, int, vector as v, type Float, type Int, type Vector } from '../formula/wasm/code.ts';
import type { FunctionWriter } from '../formula/wasm/function.ts';
import type { ModuleWriter } from '../formula/wasm/module.ts';
import { panelNodes, panelRule } from './panel.ts';
import { nodeBytes, zero } from './wasm-nodes.ts';
import { mostBreaks } from './path.ts';
import { deepestSplit } from './accuracy.ts';

/** One number at a fixed address. */
export interface Cell {
  readonly address: number;
  get(): Float;
  /** The number in both lanes. */
  both(): Vector;
  set(w: FunctionWriter, value: Float): void;
}

function makeCell(module: ModuleWriter): Cell {
  const address = module.reserve(8);
  return {
    address,
    get: () => f.load(zero, address),
    both: () => v.loadSplat(zero, address),
    set: (w, value) => w.store(zero, address, value),
  };
}

/** One whole number at a fixed address. */
export interface IntCell {
  readonly address: number;
  get(): Int;
  set(w: FunctionWriter, value: Int): void;
}

/** Sets memory aside for a whole number. */
export function makeIntCell(module: ModuleWriter): IntCell {
  const address = module.reserve(4);
  return { address, get: () => int.load(zero, address), set: (w, value) => w.store(zero, address, value) };
}

/** Where the transfer keeps what it works on, all at fixed addresses. */
export interface TransferLayout {
  readonly sinI: Cell;
  readonly cosI: Cell;
  readonly radius: Cell;
  readonly height: Cell;
  readonly longestPanel: Cell;
  /** Emission that a panel may hide over the scale of P, and the largest error that a panel may be estimated to have. */
  readonly hidden: Cell;
  readonly limit: Cell;
  readonly valleyShare: Cell;
  readonly major: Cell;
  /** Heights and depths of the ray where s = 0: minor sin i, minor cos i. */
  readonly minor: Cell;
  readonly minorSin: Cell;
  readonly minorCos: Cell;
  readonly nearPhi: Cell;
  readonly nearSigma: Cell;
  readonly nearMeasure: Cell;
  readonly samples: Cell;
  readonly from: Cell;
  readonly to: Cell;
  readonly least: Cell;
  readonly breakCount: IntCell;
  readonly breaks: number;
  readonly stack: number;
  /** Numbers of edges, and where their values lie. */
  readonly zEdges: { readonly count: IntCell; readonly address: IntCell };
  readonly rEdges: { readonly count: IntCell; readonly address: IntCell };
  readonly nodes: number;
  readonly weights: number;
  /** Weights of the sums and differences of mirrored nodes in pairs of Legendre coefficients: [degree / 2][node][2]. */
  readonly legendrePairs: number;
  /** Columns of the matrix of `PanelRule.toNearEnd`. */
  readonly toNearEnd: number;
  /** dφ/ds and dΣ/ds at the nodes. */
  readonly faraday: number;
  readonly dispersion: number;
  /** dEM/ds at the nodes. */
  readonly gas: number;
  /** Per emission group: total emission, then the two parts of the polarized one, at the nodes. */
  readonly emission: number;
  readonly z: number;
  readonly phi: number;
  readonly sigma: number;
  readonly measure: number;
}

/** Bytes of what a group emits at the nodes. */
export const emissionBytes = 3 * nodeBytes;

function legendrePairs(): number[] {
  const n = panelNodes;
  const degrees = Array.from({ length: n / 2 }, (_, k) => 2 * k);
  return degrees.flatMap((k) => Array.from({ length: n / 2 }, (_, j) => [panelRule.legendre[k * n + j], panelRule.legendre[(k + 1) * n + n - 1 - j]]).flat());
}

/** Sets memory aside for a transfer of so many emission groups. */
export function layOut(module: ModuleWriter, groups: number): TransferLayout {
  const cell = (): Cell => makeCell(module);
  const edges = (): TransferLayout['zEdges'] => ({ count: makeIntCell(module), address: makeIntCell(module) });
  const columns = Array.from({ length: panelNodes }, (_, j) => Array.from({ length: panelNodes }, (_, i) => panelRule.toNearEnd[i * panelNodes + j])).flat();
  return {
    sinI: cell(),
    cosI: cell(),
    radius: cell(),
    height: cell(),
    longestPanel: cell(),
    hidden: cell(),
    limit: cell(),
    valleyShare: cell(),
    major: cell(),
    minor: cell(),
    minorSin: cell(),
    minorCos: cell(),
    nearPhi: cell(),
    nearSigma: cell(),
    nearMeasure: cell(),
    samples: cell(),
    from: cell(),
    to: cell(),
    least: cell(),
    breakCount: makeIntCell(module),
    breaks: module.reserve(8 * mostBreaks),
    stack: module.reserve(24 * (deepestSplit + 2)),
    zEdges: edges(),
    rEdges: edges(),
    nodes: module.numbers(panelRule.nodes),
    weights: module.numbers(panelRule.weights),
    legendrePairs: module.numbers(legendrePairs()),
    toNearEnd: module.numbers(columns),
    faraday: module.reserve(nodeBytes),
    dispersion: module.reserve(nodeBytes),
    gas: module.reserve(nodeBytes),
    emission: module.reserve(emissionBytes * groups),
    z: module.reserve(nodeBytes),
    phi: module.reserve(nodeBytes),
    sigma: module.reserve(nodeBytes),
    measure: module.reserve(nodeBytes),
  };
}

/** What of an integrand decides the code that follows its rays. */
export interface TransferStructure {
  readonly program: Program;
  /** Emission group of each frequency. */
  readonly groupOf: readonly number[];
  readonly hasDispersion: boolean;
  readonly hasAbsorption: boolean;
  /** Frequencies whose integrands decide on bisection. */
  readonly tested: readonly number[];
}

/** f64 per frequency in memory: 2λ², -2λ⁴, scale of I, scale of P, -τ per emission measure, brightness of the gas. */
export const spectrumRecord = { turn: 0, damping: 8, scaleI: 16, scaleP: 24, opacity: 32, source: 40, bytes: 48 } as const;
/** Bytes of what `rotate` gives at the nodes: rotated emission, real then imaginary, and the unpolarized one that comes through gas. */
export function rotatedBytes({ hasAbsorption }: TransferStructure): number {
  return (hasAbsorption ? 3 : 2) * nodeBytes;
}

/** f64 per frequency in the results of a ray. */
export const resultsPerFrequency = 7;

/** What the parts of the transfer share while they are written. */
export interface TransferContext {
  readonly module: ModuleWriter;
  readonly layout: TransferLayout;
  /** Address of the records of all frequencies. */
  readonly spectrum: number;
  readonly structure: TransferStructure;
}
