import type { TurbulenceGrids } from '../field/turbulence.ts';
import type { SplineGrid } from '../math/spline-grid.ts';
import type { Model } from '../model/types.ts';

/** Spiral arms along log-spirals that multiply a density, or the potential of a field (`armExcess` of model/modulation.ts). */
export interface SpiralArms {
  readonly number: number;
  /** atan(B_r/B_φ), rad; negative for trailing arms. */
  readonly pitch: number;
  /** Full width at half maximum in azimuth, rad. */
  readonly width: number;
  /** Azimuth of a ridge at the reference radius, rad. */
  readonly phase: number;
  /** Excess on the ridge over the space between the arms. */
  readonly amplitude: number;
  readonly referenceKpc: number;
  /** Radius within which the arms fade. */
  readonly innerRadiusKpc: number;
}

/** What modulates a component beside its model. */
export interface ComponentShape {
  readonly arms?: SpiralArms;
  /** Height that grows with r: `height` is that at the reference radius. */
  readonly flare?: { readonly law: 'exponential' | 'linear'; readonly radiusKpc: number; readonly referenceKpc: number };
  /** Factor 1 - e^{-(r/radius)²}. */
  readonly hole?: { readonly radiusKpc: number };
  /** Filling factor f of clumps: ⟨n²⟩ = ⟨n⟩²/f. Thermal electrons only. */
  readonly filling?: number;
}

/**
 * One field or density of a scene. Numbers are in the units that formulas see: the parameter's
 * declared unit, angles in radians; those of inline formulas in kpc, uG, cm^-3 and radians.
 */
export interface Component extends ComponentShape {
  readonly name: string;
  readonly model: Model;
  readonly parameters: Readonly<Record<string, number>>;
  readonly choices: Readonly<Record<string, string>>;
  /** What the model reads on grids, by the names that its `grids` have. */
  readonly grids?: Readonly<Record<string, GriddedFunction>>;
}

/** Numbers on a grid, and how fine rays must sample it. */
export interface GriddedFunction {
  readonly grid: SplineGrid;
  /** Length of a panel of a ray at most, kpc, so that no structure is stepped over. */
  readonly panelKpc: number;
}

/** A layer of cosmic-ray electrons: a density model whose `density` is C (cm^-3, per unit gamma^-p). */
export interface CosmicRayLayer extends Component {
  /** h(nu) = height (nu/heightAt)^-heightIndex; both or neither. */
  readonly heightIndex?: number;
  readonly heightAtHz?: number;
}

export interface Galaxy {
  readonly distanceKpc: number;
  /** Angle between spin and the direction to the observer, 0 to pi. */
  readonly inclination: number;
  /** Of the receding half of the major axis, north through east, rad. */
  readonly positionAngle: number;
  readonly volume: { readonly radiusKpc: number; readonly heightKpc: number };
  /** Degrees, ICRS. */
  readonly centre?: { readonly raDeg: number; readonly decDeg: number };
}

export interface UnresolvedTurbulence {
  /** rms of one component, uG. */
  readonly rmsUG: number;
  /** Size of a cell along the ray, kpc. */
  readonly cellKpc: number;
  /** Name of a component or density whose value, divided by its strength, scales the rms. */
  readonly follows?: string;
}

/**
 * A random field that is drawn, periodic in a box whose middle is the galaxy's centre. What neither
 * the grid nor `smallestKpc` resolves counts as unresolved.
 */
export interface ResolvedTurbulence {
  /** rms of the whole spectrum, of one component in the plane, uG. */
  readonly rmsUG: number;
  readonly outerScaleKpc: number;
  /** Of the three-dimensional power spectrum. */
  readonly slope: number;
  readonly boxKpc: number;
  readonly cells: number;
  /** Waves shorter than this are not drawn. */
  readonly smallestKpc: number;
  /** rms along z over that in the plane. */
  readonly verticalRatio: number;
  /** Name of a component or density whose value, divided by its strength, scales the potential. */
  readonly follows?: string;
  /** Formula of x, y, z, r, phi (kpc) that scales the potential. */
  readonly profile?: string;
  /** Log-normal fluctuations of n_e: rms over mean, and correlation of its logarithm with the field's strength. */
  readonly electrons?: { readonly rms: number; readonly correlation: number };
  /** Which of the many fields of a seed. */
  readonly realisation: number;
}

/** Thermal gas that absorbs and emits at radio frequencies, at one temperature. */
export interface FreeFreeGas {
  readonly temperatureK: number;
}

/** Thermal dust, optically thin, of one temperature, in gas that follows the thermal electrons. */
export interface ThermalDust {
  /** Component of the thermal electrons that the gas follows; all of them where absent. */
  readonly follows?: string;
  /** Polarized share of the emission where the field lies in the sky. */
  readonly polarization: number;
  /** Hydrogen nuclei per thermal electron. */
  readonly hydrogenRatio: number;
  readonly temperatureK: number;
  /** Cross-section per hydrogen nucleus, cm². */
  readonly opacityCm2: number;
  readonly frequencyHz: number;
}

/** An ordered random field that changes sign from cell to cell along one local direction. */
export interface OrderedTurbulence {
  /** rms along that direction, uG. */
  readonly rmsUG: number;
  readonly cellKpc: number;
  readonly along: 'azimuth' | 'pitch';
  /** atan(B_r/B_φ) of the direction, rad; 0 along the azimuth. */
  readonly pitch: number;
  /** Name of a component or density whose value, divided by its strength, scales the rms. */
  readonly follows?: string;
}

/** Cosmic-ray electrons: layers, with one factor that gives them a flux density, or equipartition with the field. */
export interface CosmicRays {
  /** p of the spectrum γ^-p. */
  readonly index: number;
  /** Empty in equipartition. */
  readonly layers: readonly CosmicRayLayer[];
  /** Number ratio of protons to electrons. */
  readonly equipartition?: { readonly protonRatio: number };
  /** Flux density of the synchrotron emission of the whole volume at one frequency. */
  readonly scaleTo?: { readonly fluxJy: number; readonly atHz: number };
}

export interface Band {
  readonly name: string;
  /** Given as from/to/channels (or at + width); widthHz 0 is monochromatic. */
  readonly channels: readonly { readonly frequencyHz: number; readonly widthHz: number }[];
  /** Centre of the whole band; undefined for a list of separate frequencies. */
  readonly centreHz?: number;
  /** rms per channel in this band, in place of the observation's. */
  readonly noise?: number;
}

export interface Beam {
  /** FWHM, arcsec. */
  readonly majorArcsec: number;
  readonly minorArcsec: number;
  /** Of the major axis, north through east, rad. */
  readonly angle: number;
}

export interface ImageSpec {
  readonly nx: number;
  readonly ny: number;
  readonly pixelArcsec: number;
  /** Where the scene gives the pixel in kpc: it stays so when the distance is varied. */
  readonly pixelKpc?: number;
}

/** Depth of the foreground that grows along one direction of the sky, 0 at the galaxy's centre. */
export interface ForegroundGradient {
  readonly radM2PerArcsec: number;
  /** Where the scene gives it per kpc: it stays so when the distance is varied. */
  readonly radM2PerKpc?: number;
  /** Direction of growth, north through east, rad. */
  readonly angle: number;
}

/** A Gaussian random screen with autocorrelation rms^2 exp(-(d/scale)^2). */
export interface ForegroundScreen {
  readonly rmsRadM2: number;
  readonly scaleArcsec: number;
}

export interface Observation {
  readonly image: ImageSpec;
  readonly bands: readonly Band[];
  readonly beam?: Beam;
  /** rms per channel, Jy/beam (Jy/sr without a beam); undefined: no noise. */
  readonly noise?: number;
  /** rad m^-2, 0 where there is none. */
  readonly foregroundDepth: number;
  readonly foregroundGradient?: ForegroundGradient;
  readonly foregroundScreen?: ForegroundScreen;
  /** Spacings missing from the uv plane: fewer wavelengths than this are seen at half or less. */
  readonly missingWavelengths?: number;
}

export interface Numerics {
  readonly tolerance: number;
  readonly seed: number;
  readonly bits: 32 | 64;
}

/** A file that a scene was read with, as it stood then. */
export interface InputFile {
  /** As the scene names it. */
  readonly file: string;
  readonly sha256: string;
}

/** A checked scene: every value present, in range, in the units its name says. */
export interface Scene {
  readonly title: string;
  readonly galaxy: Galaxy;
  readonly field: readonly Component[];
  readonly thermalElectrons: readonly Component[];
  readonly cosmicRays: CosmicRays;
  readonly turbulence: { readonly unresolved?: UnresolvedTurbulence; readonly ordered?: OrderedTurbulence; readonly resolved?: ResolvedTurbulence };
  /** Free–free absorption and emission of the thermal electrons; undefined: none. */
  readonly freeFree?: FreeFreeGas;
  /** Undefined: no maps of dust. */
  readonly dust?: ThermalDust;
  /** Undefined: no map of the density-weighted B_∥. */
  readonly zeeman?: { readonly follows?: string };
  readonly observation: Observation;
  readonly numerics: Numerics;
  /** Files of gridded numbers; none where absent. */
  readonly inputs?: readonly InputFile[];
  /** The random field, where it was drawn beforehand; `key` tells for what. */
  readonly drawn?: { readonly key: string; readonly grids: TurbulenceGrids };
}
