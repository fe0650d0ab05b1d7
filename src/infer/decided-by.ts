import type { ResidualPlace } from './likelihood.ts';
import type { DataSet } from './types.ts';

const sectorCount = 12;
/** The arc named is the shortest that holds this share of a band's difference. */
const arcShare = 2 / 3;

/** Where in the data the difference between two fits comes from. */
export interface DecidedBy {
  /** chi2 of the other less chi2 of the preferred fit. */
  readonly deltaChi2: number;
  /** Per plane and per band of the data set; both sum to `deltaChi2`. */
  readonly planes: readonly number[];
  readonly bands: readonly number[];
  /** The band that contributes most, and what it does in each sector of azimuth. */
  readonly band: number;
  readonly sectors: readonly number[];
  /** Galaxy azimuth, rad, from < to; undefined where no arc stands out. */
  readonly arc?: { readonly from: number; readonly to: number };
  readonly sentence: string;
}

/**
 * Attributes the difference in chi2 between two fits to bands, planes and 12 sectors of galaxy
 * azimuth (the first centred on 0). `azimuth` gives the azimuth of a residual's place, rad, or
 * undefined outside the disc. Whitening mixes a point with its nearer neighbours, so that sectors
 * are true to about two beams.
 */
export function decidedBy(
  data: Pick<DataSet, 'bands' | 'planes'>, places: readonly ResidualPlace[],
  preferred: Float64Array, other: Float64Array, azimuth: (place: ResidualPlace) => number | undefined,
): DecidedBy {
  const differences = other.map((value, k) => value * value - preferred[k] * preferred[k]);
  const planes = new Array<number>(data.planes.length).fill(0);
  differences.forEach((value, k) => (planes[places[k].plane] += value));
  const bands = new Array<number>(data.bands.length).fill(0);
  planes.forEach((value, plane) => (bands[data.planes[plane].band] += value));
  const band = bands.indexOf(Math.max(...bands));
  const sectors = new Array<number>(sectorCount).fill(0);
  differences.forEach((value, k) => {
    if (data.planes[places[k].plane].band !== band) return;
    const angle = azimuth(places[k]);
    if (angle !== undefined) sectors[modulo(Math.round((angle / (2 * Math.PI)) * sectorCount), sectorCount)] += value;
  });
  const deltaChi2 = planes.reduce((sum, value) => sum + value, 0);
  const arc = findArc(sectors);
  return { deltaChi2, planes, bands, band, sectors, arc, sentence: sentence(data, deltaChi2, bands, band, arc) };
}

/** The shortest run of sectors that holds two thirds of their sum; the richest among equals. */
function findArc(sectors: readonly number[]): { from: number; to: number } | undefined {
  const total = sectors.reduce((sum, value) => sum + value, 0);
  if (total <= 0) return undefined;
  for (let length = 1; length <= sectorCount / 2; length++) {
    const sums = sectors.map((_, first) => {
      let sum = 0;
      for (let k = 0; k < length; k++) sum += sectors[(first + k) % sectorCount];
      return sum;
    });
    const most = Math.max(...sums);
    if (most < arcShare * total) continue;
    const sector = (2 * Math.PI) / sectorCount;
    const from = (sums.indexOf(most) - 0.5) * sector;
    return { from, to: from + length * sector };
  }
  return undefined;
}

function sentence(
  data: Pick<DataSet, 'bands'>, deltaChi2: number, bands: readonly number[], band: number,
  arc: { from: number; to: number } | undefined,
): string {
  if (deltaChi2 <= 0) return 'The preferred model fits no better; it is preferred because it has fewer parameters.';
  const degrees = (angle: number): string => `${Math.round((angle * 180) / Math.PI)}`;
  const where = arc
    ? `two thirds of it at galaxy azimuths ${degrees(arc.from)} to ${degrees(arc.to)} deg`
    : 'spread over more than half of all azimuths';
  if (data.bands.length === 1) return `The fits differ by ${deltaChi2.toFixed(1)} in chi2, ${where}.`;
  return `Decided by band ${data.bands[band].name}: chi2 differs by ${bands[band].toFixed(1)} there (${deltaChi2.toFixed(1)} in all), ${where}.`;
}

function modulo(value: number, divisor: number): number {
  return ((value % divisor) + divisor) % divisor;
}
