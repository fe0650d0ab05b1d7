import { verticalRatios } from '../field/turbulence-spectrum.ts';
import type { Limits } from '../units/limits.ts';
import { quantity } from '../units/schema.ts';

/** A quantity of a scene that is not a model's parameter. */
export interface SceneLimit {
  readonly limits: Limits;
  /** Unit of the number in `Scene`. */
  readonly internalUnit: string;
  readonly meaning: string;
}

function limit(unit: string, min: number, max: number, internalUnit: string, meaning: string, more: Partial<Limits> = {}): SceneLimit {
  return { limits: { unit, min, max, ...more }, internalUnit, meaning };
}

const above = { above: true };
const whole = { whole: true };

/** Every quantity of a scene beside the models' parameters: units, ranges, meanings. */
export const sceneLimits = {
  distance: limit('Mpc', 0.001, 100000, 'kpc', 'distance of the galaxy'),
  inclination: limit('deg', 0, 180, 'rad', 'angle between the spin and the direction to the observer'),
  positionAngle: limit('deg', -360, 360, 'rad', 'of the receding half of the major axis, north through east'),
  volumeRadius: limit('kpc', 0, 1000, 'kpc', 'radius of the cylinder that is computed', above),
  volumeHeight: limit('kpc', 0, 1000, 'kpc', 'half height of the cylinder that is computed', above),
  ra: limit('deg', 0, 360, 'deg', 'right ascension of the centre, ICRS'),
  dec: limit('deg', -90, 90, 'deg', 'declination of the centre, ICRS'),
  index: limit('', 1, 5, '', 'p of the electron spectrum gamma^-p', above),
  heightIndex: limit('', -3, 3, '', 'height falls as frequency^-heightIndex'),
  heightAt: limit('GHz', 0.001, 1000, 'Hz', 'frequency at which height is given'),
  rms: limit('uG', 0, 10000, 'uG', 'rms of one component of the unresolved field'),
  cell: limit('kpc', 0, 100, 'kpc', 'size of a turbulent cell along the ray', above),
  orderedRms: limit('uG', 0, 10000, 'uG', 'rms of the ordered random field along its direction'),
  orderedPitch: limit('deg', -90, 90, 'rad', 'atan(B_r/B_phi) of the direction of the ordered random field'),
  dustPolarization: limit('', 0, 1, '', 'polarized share of the dust emission where the field lies in the sky'),
  hydrogenRatio: limit('', 0, 1e6, '', 'hydrogen nuclei per thermal electron', above),
  dustTemperature: limit('K', 2, 2000, 'K', 'temperature of the dust'),
  dustOpacity: limit('cm^2', 0, 1e-15, 'cm^2', 'cross-section of the dust per hydrogen nucleus at the frequency', above),
  dustFrequency: limit('GHz', 10, 30000, 'Hz', 'frequency at which dust is seen'),
  protonRatio: limit('', 0, 1e6, '', 'number ratio K0 of cosmic-ray protons to electrons'),
  flux: limit('Jy', 0, 1e12, 'Jy', 'flux density of the synchrotron emission of the whole volume', above),
  fluxAt: limit('GHz', 0.001, 1000, 'Hz', 'frequency of the flux density'),
  armNumber: limit('', 1, 32, '', 'number of spiral arms', whole),
  armPitch: limit('deg', -89, 89, 'rad', 'pitch angle of the arms; negative for trailing ones', { nonZero: true }),
  armWidth: limit('deg', 0.1, 180, 'rad', 'full width of an arm at half maximum, in azimuth'),
  armPhase: limit('deg', -360, 360, 'rad', 'azimuth of an arm at the reference radius'),
  armAmplitude: limit('', -1, 1000, '', 'excess on an arm over the space between arms'),
  armReference: limit('kpc', 0, 1000, 'kpc', 'radius at which the phase is given', above),
  armInnerRadius: limit('kpc', 0, 1000, 'kpc', 'radius within which the arms fade', above),
  flareRadius: limit('kpc', 0, 100000, 'kpc', 'scale of the growth of the height with r', above),
  flareReference: limit('kpc', 0, 1000, 'kpc', 'radius at which the height is given'),
  holeRadius: limit('kpc', 0, 1000, 'kpc', 'radius within which the component fades', above),
  filling: limit('', 0, 1, '', 'filling factor f of clumps, with <n^2> = <n>^2/f', above),
  temperature: limit('K', 100, 1e9, 'K', 'temperature of the thermal gas that absorbs and emits'),
  resolvedRms: limit('uG', 0, 10000, 'uG', 'rms of one component of the turbulent field over its whole spectrum, in the plane'),
  outerScale: limit('kpc', 0, 1000, 'kpc', 'longest wave of the turbulent field', above),
  turbulenceBox: limit('kpc', 0, 10000, 'kpc', 'side of the box that the turbulent field repeats in', above),
  smallestWave: limit('kpc', 0, 1000, 'kpc', 'shortest wave that is drawn; two pixels where it is left out'),
  verticalRatio: limit('', verticalRatios[0], verticalRatios[1], '', 'rms of the turbulent field along z over that in the plane'),
  electronRms: limit('', 0, 100, '', 'rms of the fluctuations of n_e over its mean'),
  electronCorrelation: limit('', -1, 1, '', 'correlation of the logarithm of n_e with the strength of the turbulent field'),
  realisation: limit('', 0, 1e9, '', 'which of the many turbulent fields of a seed', whole),
  pixels: limit('', 1, 16384, '', 'pixels along one side', whole),
  pixelArcsec: limit('arcsec', 0, 36000, 'arcsec', 'side of a pixel', above),
  pixelKpc: limit('kpc', 0, 1000, 'kpc', 'side of a pixel at the distance of the galaxy', above),
  frequency: limit('GHz', 0.001, 1000, 'Hz', 'frequency'),
  width: limit('GHz', 0, 1000, 'Hz', 'width of a channel', above),
  channels: limit('', 1, 65536, '', 'number of channels', whole),
  beamMajor: limit('arcsec', 0, 36000, 'arcsec', 'FWHM of the beam along its major axis', above),
  beamMinor: limit('arcsec', 0, 36000, 'arcsec', 'FWHM of the beam along its minor axis', above),
  beamAngle: limit('deg', -360, 360, 'rad', 'of the major axis of the beam, north through east'),
  noiseBeam: limit('Jy/beam', 0, 1e9, 'Jy/beam', 'rms of the noise of a channel'),
  noiseSteradian: limit('Jy/sr', 0, 1e20, 'Jy/sr', 'rms of the noise of a channel'),
  foregroundDepth: limit('rad/m^2', -1e6, 1e6, 'rad/m^2', 'Faraday depth of the foreground'),
  gradientAngular: limit('rad/m^2/arcmin', -1e6, 1e6, 'rad/m^2/arcsec', 'growth of the foreground depth over the sky'),
  gradientLinear: limit('rad/m^2/kpc', -1e6, 1e6, 'rad/m^2/kpc', 'growth of the foreground depth at the distance of the galaxy'),
  gradientAngle: limit('deg', -360, 360, 'rad', 'direction in which the foreground depth grows, north through east'),
  screenRms: limit('rad/m^2', 0, 1e6, 'rad/m^2', 'rms of the random foreground screen'),
  screenScale: limit('arcsec', 0, 360000, 'arcsec', 'distance at which the autocorrelation of the screen has fallen to 1/e', above),
  missingWavelengths: limit('', 0, 1e9, '', 'spacings below so many wavelengths are missing', above),
  missingScale: limit('arcsec', 0, 360000, 'arcsec', 'structure larger than this is missing', above),
  tolerance: limit('', 1e-12, 0.1, '', 'largest error relative to the map, see physics.md section 3'),
  seed: limit('', 0, 1e15, '', 'seed of everything random', whole),
} as const satisfies Readonly<Record<string, SceneLimit>>;

/** The schema of one of these quantities: text with a unit in, a number in its internal unit out. */
export function limited({ limits, internalUnit, meaning }: SceneLimit): ReturnType<typeof quantity> {
  return quantity(limits, internalUnit, meaning);
}
