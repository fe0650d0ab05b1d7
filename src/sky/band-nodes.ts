import { chebyshevAt, chebyshevNodes, lagrangeAt } from '../math/chebyshev.ts';
import { gaussLegendre } from '../math/quadrature.ts';
import type { SpectralPoint } from '../ray/integrand.ts';
import { brightnessPerKpc } from '../ray/synchrotron.ts';
import { speedOfLight } from '../units/constants.ts';
import type { Channel } from './types.ts';
import { lambda2M2 } from './wavelength.ts';

/**
 * Where rays are followed so that all channels of a band can be interpolated: `degrees` Chebyshev
 * nodes in wavelength squared over the whole band, edges included. Polarization over nu^-alpha is an
 * entire function of it, band-limited by the depths along the ray (Burn 1966, eq. 8).
 * Where layers depend on frequency they do so by their channel's centre: then every node is taken
 * for several centres, `offsetsHz` away from it, as far as a channel's centre can be.
 */
export interface BandNodes {
  readonly degrees: number;
  readonly offsetsHz: Float64Array;
  /** Middle and half of the range of wavelength squared, m^2. */
  readonly middleM2: number;
  readonly halfM2: number;
  /** What to follow, [node * offsets + offset]. */
  readonly spectrum: readonly SpectralPoint[];
}

/** The nodes of a band's channels. */
export function makeBandNodes(channels: readonly Channel[], degrees: number, offsets: number): BandNodes {
  const lowest = Math.min(...channels.map(({ frequencyHz, widthHz }) => frequencyHz - widthHz / 2));
  const highest = Math.max(...channels.map(({ frequencyHz, widthHz }) => frequencyHz + widthHz / 2));
  const middleM2 = (lambda2M2(lowest) + lambda2M2(highest)) / 2;
  const halfM2 = (lambda2M2(lowest) - lambda2M2(highest)) / 2;
  const offsetsHz = centreOffsets(channels, offsets);
  const spectrum = Array.from(chebyshevNodes(degrees), (x) => speedOfLight.value / Math.sqrt(middleM2 + halfM2 * x)).flatMap((frequencyHz) =>
    Array.from(offsetsHz, (offset): SpectralPoint => ({ frequencyHz, centreHz: frequencyHz + offset })),
  );
  return { degrees, offsetsHz, middleM2, halfM2, spectrum };
}

/** Offsets of centres: Chebyshev points of the first kind within half the widest channel. */
function centreOffsets(channels: readonly Channel[], count: number): Float64Array {
  const reach = Math.max(...channels.map(({ widthHz }) => widthHz)) / 2;
  return Float64Array.from({ length: count }, (_, k) => (count === 1 ? 0 : reach * Math.cos((Math.PI * (2 * k + 1)) / (2 * count))));
}

/** Brightness is divided by this at each point: what is left of it turns, but follows no spectrum. */
export function spectrumAt(index: number, points: readonly SpectralPoint[]): Float64Array {
  return Float64Array.from(points, ({ frequencyHz }) => brightnessPerKpc(index, frequencyHz));
}

/** Beyond what averages polynomials of the band's degree exactly: for the spectrum across a channel. */
const spareNodes = 12;

/**
 * The matrix [channel * terms + term] from coefficients of polarization over spectrum to the mean
 * over each channel's width, equal weight to each frequency. Terms are [degree * offsets + offset].
 */
export function channelMatrix({ degrees, offsetsHz, middleM2, halfM2 }: BandNodes, channels: readonly Channel[], index: number): Float64Array {
  const offsets = offsetsHz.length;
  const terms = degrees * offsets;
  const matrix = new Float64Array(channels.length * terms);
  forChannelNodes(channels, degrees, (channel, frequencyHz, weight) => {
    const polynomials = chebyshevAt(Math.max(-1, Math.min(1, (lambda2M2(frequencyHz) - middleM2) / halfM2)), degrees);
    const shares = lagrangeAt(channels[channel].frequencyHz - frequencyHz, offsetsHz);
    const spectrum = weight * brightnessPerKpc(index, frequencyHz);
    for (let term = 0; term < terms; term++) {
      matrix[channel * terms + term] += spectrum * polynomials[Math.floor(term / offsets)] * shares[term % offsets];
    }
  });
  return matrix;
}

/** The mean of the spectrum over each channel: all there is to Stokes I where emission depends on frequency in no other way. */
export function channelSpectrum(channels: readonly Channel[], index: number): Float64Array {
  const means = new Float64Array(channels.length);
  forChannelNodes(channels, 0, (channel, frequencyHz, weight) => (means[channel] += weight * brightnessPerKpc(index, frequencyHz)));
  return means;
}

function forChannelNodes(channels: readonly Channel[], degrees: number, take: (channel: number, frequencyHz: number, weight: number) => void): void {
  const rule = gaussLegendre(degrees + spareNodes);
  channels.forEach(({ frequencyHz, widthHz }, channel) => {
    if (widthHz === 0) take(channel, frequencyHz, 1);
    else rule.nodes.forEach((x, k) => take(channel, frequencyHz + (x * widthHz) / 2, rule.weights[k] / 2));
  });
}
