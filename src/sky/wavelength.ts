import { speedOfLight } from '../units/constants.ts';
import type { Channel } from './types.ts';

/** Wavelength squared at a frequency, m^2. */
export { wavelengthSquared as lambda2M2 } from '../ray/synchrotron.ts';

/** Mean wavelength squared over a channel, m^2: that of c^2/nu^2 over its band of frequencies. */
export function channelLambda2M2({ frequencyHz, widthHz }: Channel): number {
  return speedOfLight.value ** 2 / (frequencyHz ** 2 - widthHz ** 2 / 4);
}
