/** What a run used, as far as its methods paragraph differs by it. */
export interface MethodsUse {
  readonly tolerance: number;
  readonly turbulence?: boolean;
  readonly equipartition?: boolean;
  readonly freeFree?: boolean;
  readonly beam?: boolean;
  readonly noise?: boolean;
  readonly debiased?: boolean;
  /** How rotation measures were taken from the angles; undefined where none were. */
  readonly rotationMeasure?: 'bands' | 'fit' | 'synthesis';
  readonly fit?: 'least-squares' | 'walkers' | 'nested';
}

/** A paragraph and the works that it cites, in alphabetical order. */
export interface MethodsText {
  readonly paragraph: string;
  readonly citations: readonly string[];
}

/** Bibliographic lines are from memory. */
const WORKS: Readonly<Record<string, string>> = {
  'Akaike 1974': 'IEEE Transactions on Automatic Control 19, 716',
  'Beck & Krause 2005': 'Astronomische Nachrichten 326, 414',
  'Brentjens & de Bruyn 2005': 'A&A 441, 1217',
  'Burn 1966': 'MNRAS 133, 67',
  'Goodman & Weare 2010': 'Communications in Applied Mathematics and Computational Science 5, 65',
  'Levenberg 1944': 'Quarterly of Applied Mathematics 2, 164',
  'Marquardt 1963': 'Journal of the Society for Industrial and Applied Mathematics 11, 431',
  'Mezger & Henderson 1967': 'ApJ 147, 471',
  'Rybicki & Lightman 1979': 'Radiative Processes in Astrophysics, Wiley',
  'Skilling 2006': 'Bayesian Analysis 1, 833',
  'Sokoloff et al. 1998': 'MNRAS 299, 189',
  'Wardle & Kronberg 1974': 'ApJ 194, 249',
};

const ROTATION_MEASURES = {
  bands: 'Rotation measures are from the polarization angles of two bands.',
  fit: 'Rotation measures are the slopes of weighted fits of polarization angle against wavelength squared, with half turns resolved.',
  synthesis: 'Rotation measures are the peaks of Faraday depth spectra (Brentjens & de Bruyn 2005).',
};

const FITS = {
  'least-squares': 'Each hypothesis was fitted by damped least squares (Levenberg 1944; Marquardt 1963); errors are from the covariance at the minimum.',
  walkers: 'Posteriors were sampled by affine-invariant walkers (Goodman & Weare 2010).',
  nested: 'Posteriors and evidences are from nested sampling (Skilling 2006).',
};

/** The methods of a run in sentences fit for a paper, with the works they cite. */
export function methodsText(use: MethodsUse): MethodsText {
  const sentences = [
    'Stokes I, Q and U were integrated along sightlines through each model galaxy: synchrotron emission of electrons with a power-law spectrum (Rybicki & Lightman 1979), rotated by the magnetized plasma between its place and the observer (Burn 1966).',
    use.equipartition && 'Cosmic-ray electrons follow from equipartition of energy with the field (Beck & Krause 2005).',
    use.turbulence && 'Turbulence below the resolution adds to the emission and disperses Faraday depth along each sightline (Burn 1966; Sokoloff et al. 1998).',
    use.freeFree && 'Thermal gas absorbs and emits (Mezger & Henderson 1967).',
    `At every channel I is integrated to ${use.tolerance} of its largest value, Q and U to ${use.tolerance} of the largest polarized intensity (or of a thousandth of I, where that is more).`,
    use.beam && 'Q and U were averaged over each channel and smoothed by the beam separately, before polarized intensities and angles were taken.',
    use.noise && 'Seeded Gaussian noise correlated like the beam was added.',
    use.debiased && 'Polarized intensities are corrected for the bias of noise (Wardle & Kronberg 1974).',
    use.rotationMeasure && ROTATION_MEASURES[use.rotationMeasure],
    use.fit && FITS[use.fit],
    use.fit && 'Hypotheses are ranked by the Akaike information criterion (Akaike 1974).',
    'Position angles run from north through east, Faraday depth is positive where the field points to the observer, and lines show the polarization angle turned by 90°.',
  ];
  const paragraph = sentences.filter((sentence) => typeof sentence === 'string').join(' ');
  const citations = Object.entries(WORKS)
    .filter(([work]) => paragraph.includes(work))
    .map(([work, place]) => `${work}, ${place}`);
  return { paragraph, citations };
}
