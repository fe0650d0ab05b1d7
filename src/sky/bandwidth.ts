import { InputError } from '../units/input-error.ts';
import { gaussLegendre } from '../math/quadrature.ts';
import type { Channel } from './types.ts';
import { lambda2M2 } from './wavelength.ts';

/** Frequencies whose weighted sum is the mean over a channel; the weights sum to 1. */
export interface ChannelNodes {
  readonly frequenciesHz: Float64Array;
  readonly weights: Float64Array;
}

const mostNodes = 200;
/** Brightness may fall as steeply as nu^-4 across a channel. */
const steepestIndex = 4;
/** Optical depths of thermal gas at a channel's centre that its mean is tried with: where e^-tau changes most for the light that is left. */
const opticalDepths = [1, 4] as const;

/** How brightness may change across a channel of the centre nu_0, as functions of nu/nu_0. */
const spectra: readonly ((ratio: number) => number)[] = [() => 1, (ratio) => ratio ** -steepestIndex];
const absorbedSpectra = opticalDepths.map((depth) => (ratio: number) => ratio ** -1 * Math.exp(-depth * ratio ** -2.1));

/**
 * The mean over a channel's band of frequencies (equal weight to each frequency): Gauss-Legendre
 * nodes, as few as keep the error of the mean below `tolerance` of |P| at Faraday depths up to
 * `largestDepth` (rad m^-2, either sign), through thermal gas too where it `absorbs`. A monochromatic
 * channel has one node.
 * Throws InputError where the channel is so wide that it cannot be done with 200 nodes.
 */
export function channelNodes(channel: Channel, largestDepth: number, tolerance: number, absorbs = false): ChannelNodes {
  const { frequencyHz, widthHz } = channel;
  if (widthHz === 0) {
    return { frequenciesHz: Float64Array.of(frequencyHz), weights: Float64Array.of(1) };
  }
  if (!(widthHz > 0 && widthHz < 2 * frequencyHz)) {
    throw new InputError(
      `a channel at ${frequencyHz} Hz of width ${widthHz} Hz; the width must lie between 0 and twice the frequency`,
    );
  }
  const turns = phaseAcross(channel, largestDepth) / (2 * Math.PI);
  // A rule needs more than pi/2 nodes a turn: below that the search is in vain.
  for (let count = Math.max(1, Math.floor(turns)); count <= mostNodes; count++) {
    const nodes = nodesOf(channel, count);
    if (meanError(channel, nodes, largestDepth, absorbs) < tolerance) return nodes;
  }
  throw new InputError(
    `a channel at ${frequencyHz} Hz of width ${widthHz} Hz turns the polarization ${turns.toPrecision(3)} times ` +
      `across its width at a Faraday depth of ${largestDepth.toPrecision(3)} rad/m^2; divide it into narrower channels`,
  );
}

/** Phase 2 depth (lambda^2_max - lambda^2_min) across a channel, rad. */
export function phaseAcross({ frequencyHz, widthHz }: Channel, depth: number): number {
  return 2 * Math.abs(depth) * (lambda2M2(frequencyHz - widthHz / 2) - lambda2M2(frequencyHz + widthHz / 2));
}

/** The mean over a channel of planes [node * pixels + pixel], one per node. */
export function averageNodes(planes: Float64Array, weights: Float64Array): Float64Array {
  const pixels = planes.length / weights.length;
  const mean = new Float64Array(pixels);
  for (let node = 0, k = 0; node < weights.length; node++) {
    for (let pixel = 0; pixel < pixels; pixel++, k++) mean[pixel] += weights[node] * planes[k];
  }
  return mean;
}

function nodesOf({ frequencyHz, widthHz }: Channel, count: number): ChannelNodes {
  const rule = gaussLegendre(count);
  return {
    frequenciesHz: rule.nodes.map((x) => frequencyHz + (x * widthHz) / 2),
    weights: rule.weights.map((weight) => weight / 2),
  };
}

/**
 * The largest error of a rule over what it must average, the flat and the steepest spectrum, turned
 * at depths up to the largest, against a rule that is certainly finer.
 */
function meanError(channel: Channel, nodes: ChannelNodes, largestDepth: number, absorbs: boolean): number {
  const fine = nodesOf(channel, 2 * nodes.weights.length + 12 + Math.ceil(phaseAcross(channel, largestDepth) / 2));
  let worst = 0;
  for (const spectrum of absorbs ? [...spectra, ...absorbedSpectra] : spectra) {
    for (const share of [0, 0.5, 0.75, 1]) {
      const [re, im] = meanOf(nodes, channel, spectrum, share * largestDepth);
      const [fineRe, fineIm] = meanOf(fine, channel, spectrum, share * largestDepth);
      worst = Math.max(worst, Math.hypot(re - fineRe, im - fineIm));
    }
  }
  return worst;
}

function meanOf(nodes: ChannelNodes, channel: Channel, spectrum: (ratio: number) => number, depth: number): [re: number, im: number] {
  const { frequencyHz } = channel;
  const middle = lambda2M2(frequencyHz);
  let re = 0;
  let im = 0;
  nodes.frequenciesHz.forEach((frequency, k) => {
    const amplitude = nodes.weights[k] * spectrum(frequency / frequencyHz);
    const angle = 2 * depth * (lambda2M2(frequency) - middle);
    re += amplitude * Math.cos(angle);
    im += amplitude * Math.sin(angle);
  });
  return [re, im];
}
