/** A quantity of the galaxy at radius and height in kpc. */
export type Profile = (radiusKpc: number, heightKpc: number) => number;

/**
 * What drives the field. Lengths in kpc, speeds in km/s, so that the unit of time is kpc s/km
 * (977.8 Myr) and that of diffusivity kpc km/s (3.09e26 cm^2/s).
 */
export interface DynamoProfiles {
  /** Omega, km/s/kpc. */
  readonly angularSpeed: Profile;
  /** km/s. */
  readonly alpha: Profile;
  /** Turbulent diffusivity, kpc km/s. */
  readonly diffusivity: Profile;
  /** Radial and vertical part of the wind, km/s. */
  readonly windRadial: Profile;
  readonly windVertical: Profile;
  /** Field at which alpha is halved, uG. */
  readonly equipartition: Profile;
}

/** Where the volume ends and what lies outside: matter at rest that diffuses so many times faster. */
export interface Surroundings {
  readonly radiusKpc: number;
  readonly heightKpc: number;
  readonly ratio: number;
}

/** The change to the surroundings takes this share of the radius, outward of the volume. */
const transition = 0.2;

/**
 * Profiles with poorly conducting surroundings, which stand for a vacuum: outside the volume motion and
 * alpha fade while the diffusivity grows by `ratio`, smoothly, so that the order of the scheme is kept.
 */
export function withSurroundings(profiles: DynamoProfiles, { radiusKpc, heightKpc, ratio }: Surroundings): DynamoProfiles {
  const width = transition * radiusKpc;
  const outside: Profile = (r, z) => {
    const distance = Math.hypot(Math.max(0, r - radiusKpc), Math.max(0, Math.abs(z) - heightKpc));
    const t = Math.min(1, distance / width);
    return t * t * t * (10 - t * (15 - 6 * t));
  };
  const fading = (profile: Profile): Profile => (r, z) => {
    const inside = 1 - outside(r, z);
    return inside === 0 ? 0 : inside * profile(r, z);
  };
  // Formulas need not make sense far outside: what does not fade keeps the value where the change ends.
  const held = (profile: Profile): Profile => (r, z) => {
    const most = heightKpc + width;
    return profile(Math.min(r, radiusKpc + width), Math.max(-most, Math.min(most, z)));
  };
  const diffusivity = held(profiles.diffusivity);
  return {
    angularSpeed: held(profiles.angularSpeed),
    alpha: fading(profiles.alpha),
    diffusivity: (r, z) => diffusivity(r, z) * ratio ** outside(r, z),
    windRadial: fading(profiles.windRadial),
    windVertical: fading(profiles.windVertical),
    equipartition: held(profiles.equipartition),
  };
}
