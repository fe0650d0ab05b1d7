import type { Beam } from '../scene/types.ts';
import type { Channel, SkyGrid, StokesCube } from '../sky/types.ts';
import { asciiText } from './fits-card-write.ts';
import { frequencyAxis } from './frequency-axis.ts';
import type { Provenance } from './fits-scene.ts';
import { sceneTable } from './fits-scene.ts';
import type { Card, ImageHdu, TableHdu } from './fits-types.ts';
import { makeImage, writeFits } from './fits-write.ts';
import type { MapSky, ThirdAxis } from './sky-header.ts';
import { beamCards, conventionCards, coordinateCards, DEPTH_AXIS, skyOfGrid } from './sky-header.ts';

/** What every map or cube says of itself. */
interface Quantity {
  /** Such as `RM`, `P`, `chi`, `P error`. */
  readonly quantity: string;
  /** BUNIT; empty for a pure number. */
  readonly unit: string;
  /** A scene's grid, or the sky of a user's own map. */
  readonly sky: SkyGrid | MapSky;
  readonly beam?: Beam;
  readonly band?: string;
  /** Further comments for the header, plain sentences. */
  readonly comments?: readonly string[];
}

/** A map, values [row * nx + column], NaN blank. */
export interface MapQuantity extends Quantity {
  readonly values: Float64Array;
  /** The frequency at which it holds, where it holds at one. */
  readonly frequencyHz?: number;
  /** Given where `values` has one map per channel, [channel * ny * nx + row * nx + column]. */
  readonly channels?: readonly Channel[];
}

/** A cube over Faraday depth, values [depth * ny * nx + row * nx + column], NaN blank. */
export interface DepthCube extends Quantity {
  readonly values: Float64Array;
  readonly firstDepthRadM2: number;
  readonly depthStepRadM2: number;
  readonly depthCount: number;
  /** The wavelength squared at which the angles of the spectrum hold, m^2. */
  readonly referenceLambdaM2?: number;
}

/**
 * The FITS file of one Stokes parameter of one band: a cube (RA, Dec, frequency) in the primary
 * unit, the channels' table where they are not evenly spaced, and the scene.
 */
export function stokesFits(cube: StokesCube, stokes: 'I' | 'Q' | 'U', provenance: Provenance, bits: 32 | 64): Uint8Array {
  const { axis, table } = frequencyAxis(cube.channels, cube.noise);
  const described = { quantity: stokes, unit: cube.unit, sky: cube.grid, beam: cube.beam, band: cube.band };
  return skyFits({ ...described, values: cube[stokes], third: axis, cards: [], tables: table ? [table] : [] }, provenance, bits);
}

/** The units of such a file but for the values of the first, which are written part by part. */
export function stokesUnits(cube: Omit<StokesCube, 'I' | 'Q' | 'U'>, stokes: 'I' | 'Q' | 'U', provenance: Provenance, bits: 32 | 64): { primary: ImageHdu; tables: TableHdu[] } {
  const { axis, table } = frequencyAxis(cube.channels, cube.noise);
  const described = { quantity: stokes, unit: cube.unit, sky: cube.grid, beam: cube.beam, band: cube.band };
  return skyUnits({ ...described, values: new Float64Array(0), third: axis, cards: [], tables: table ? [table] : [] }, provenance, bits);
}

/** The FITS file of a map, or of one map per channel, with the scene it was made from. */
export function mapFits(map: MapQuantity, provenance: Provenance, bits: 32 | 64): Uint8Array {
  if (map.channels !== undefined) {
    const { axis, table } = frequencyAxis(map.channels, new Float64Array(map.channels.length));
    return skyFits({ ...map, third: axis, cards: [], tables: table ? [table] : [] }, provenance, bits);
  }
  const cards: Card[] =
    map.frequencyHz === undefined ? [] : [{ keyword: 'FREQ', value: map.frequencyHz, comment: '[Hz] at which this map holds' }];
  return skyFits({ ...map, cards, tables: [] }, provenance, bits);
}

/** The FITS file of a cube with a linear axis of Faraday depth (free-form CTYPE `FDEP`), with its scene. */
export function depthCubeFits(cube: DepthCube, provenance: Provenance, bits: 32 | 64): Uint8Array {
  return skyFits({ ...cube, ...depthAxis(cube), tables: [] }, provenance, bits);
}

/** The units of such a file but for the values of the first, which are written bit by bit. */
export function depthCubeUnits(cube: Omit<DepthCube, 'values'>, provenance: Provenance, bits: 32 | 64 = 32): { primary: ImageHdu; tables: TableHdu[] } {
  return skyUnits({ ...cube, ...depthAxis(cube), values: new Float64Array(0), tables: [] }, provenance, bits);
}

function depthAxis(cube: Omit<DepthCube, 'values'>): Pick<SkyFits, 'third' | 'cards'> {
  const third: ThirdAxis = {
    ctype: DEPTH_AXIS,
    cunit: 'rad/m2',
    crpix: 1,
    crval: cube.firstDepthRadM2,
    cdelt: cube.depthStepRadM2,
    length: cube.depthCount,
  };
  const cards: Card[] =
    cube.referenceLambdaM2 === undefined
      ? []
      : [{ keyword: 'LAMSQ0', value: cube.referenceLambdaM2, comment: '[m2] wavelength squared of the angles' }];
  return { third, cards };
}

interface SkyFits extends Quantity {
  readonly values: Float64Array;
  readonly third?: ThirdAxis;
  readonly cards: readonly Card[];
  readonly tables: readonly TableHdu[];
}

function skyFits(image: SkyFits, provenance: Provenance, bits: 32 | 64): Uint8Array {
  const { primary, tables } = skyUnits(image, provenance, bits);
  return writeFits([primary, ...tables]);
}

function skyUnits(image: SkyFits, provenance: Provenance, bits: 32 | 64): { primary: ImageHdu; tables: TableHdu[] } {
  const sky = 'wcs' in image.sky ? image.sky : skyOfGrid(image.sky);
  const shape = [sky.nx, sky.ny, ...(image.third ? [image.third.length] : [])];
  const cards: Card[] = [
    { keyword: 'QUANTITY', value: asciiText(image.quantity), comment: 'what the pixels hold' },
    ...(image.unit === '' ? [] : [{ keyword: 'BUNIT', value: asciiText(image.unit) }]),
    ...(image.band === undefined ? [] : [{ keyword: 'BAND', value: asciiText(image.band), comment: 'name in the scene' }]),
    ...coordinateCards(sky.wcs, image.third),
    ...image.cards,
    ...beamCards(image.beam),
    ...conventionCards(),
    ...(image.comments ?? []).map((comment) => ({ keyword: 'COMMENT', comment: asciiText(comment) })),
    { keyword: 'COMMENT', comment: 'The scene that this was made from is in the table SCENE.' },
  ];
  const primary = makeImage(shape, image.values, bits === 32 ? -32 : -64, cards);
  return { primary, tables: [...image.tables, sceneTable(provenance)] };
}
