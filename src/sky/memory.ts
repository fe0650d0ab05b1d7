import { InputError } from '../units/input-error.ts';
import { goodSize } from '../math/fft.ts';

/** What sets the memory that the maps of an observation take. */
export interface MapSize {
  readonly nx: number;
  readonly ny: number;
  /** Pixels added on each side for the beam. */
  readonly margin: number;
  /** Over all bands: those that are kept as means over their width, not made from a band's nodes when written. */
  readonly channels: number;
  /** Frequencies followed along the rays: nodes of channels and of bands. */
  readonly frequencies: number;
}

/** Memory that a map may take unless the caller allows more, bytes. */
export const memoryLimitBytes = 4e9;

const bytesPerNumber = 8;
/** Per ray and frequency, and per pixel and channel: I, Q, U. */
const numbersPerRay = 3;
const numbersPerPixel = 3;

/** Bytes that the rays, cubes and Fourier transforms of an observation need, all counted. */
export function memoryNeededBytes({ nx, ny, margin, channels, frequencies }: MapSize): number {
  const [grownX, grownY] = [nx + 2 * margin, ny + 2 * margin];
  const rays = grownX * grownY;
  const transform = 3 * goodSize(grownX + margin) * goodSize(grownY + margin);
  return bytesPerNumber * (rays * (3 + numbersPerRay * frequencies + numbersPerPixel * channels) + transform);
}

/** Throws InputError, with the memory it would need, where an observation is too large to hold. */
export function refuseTooLarge(size: MapSize, limitBytes = memoryLimitBytes): void {
  const needed = memoryNeededBytes(size);
  if (needed <= limitBytes) return;
  const margin = size.margin > 0 ? ` with a margin of ${size.margin} pixels on each side for the beam` : '';
  throw new InputError(
    `${size.nx} x ${size.ny} pixels${margin} and ${size.channels} channels (${size.frequencies} frequencies ` +
      `along each ray) need ${gigabytes(needed)} of memory, more than the ${gigabytes(limitBytes)} allowed; ` +
      'take fewer or larger pixels, or fewer channels',
  );
}

function gigabytes(bytes: number): string {
  return `${Number((bytes / 1e9).toPrecision(3))} GB`;
}
