import { methodsText } from '../../src/figure/methods-text.ts';
import type { Report } from '../../src/figure/report.ts';
import { sampleMaps, sampleSectors } from './sample.ts';

/** A small report on invented data with three hypotheses. */
export function sampleReport(): Report {
  const [observed, helical, quadrupole, disc] = [0.6, 0.55, 0.35, 0.05].map((fade) => sampleMaps(fade));
  const views = (maps: typeof observed) => ({ map: maps.p, orientation: maps.orientation });
  const hypothesis = (name: string, chi2PerN: number, deltaAic: number, decidedBy: string, verdict: string) => ({
    name, chi2PerN, deltaAic, decidedBy, verdict,
    parameters: [
      { name: 'field.halo.strength', unit: 'uG', value: 2.3456, error: 0.1234, allowed: '0 to 6 µG', meaning: 'B_r in the plane at the reference radius' },
      { name: 'galaxy.inclination', unit: 'deg', value: 38.21, below: 0.62, above: 0.87, allowed: '30° to 45°' },
    ],
    sources: [{ model: 'axisymmetric-spiral', source: 'Shukurov & Subramanian 2021, ch. 13' }],
  });
  return {
    title: 'The Lantern Wheel',
    question: 'Which halo makes the receding side fade?',
    answer: 'The data prefer “helical halo” to “cored quadrupole” decisively.',
    data: [
      { quantity: 'Q, U', file: 'q.fits, u.fits', about: '1.4 GHz, beam 40″ × 28″, noise 20 µJy/beam, 9409 pixels', assumed: ['IAU signs: the header says so.', 'Noise has the shape of the beam.'] },
      { quantity: 'RM', file: 'rm.fits', about: 'from 1.4 and 4.8 GHz', assumed: [] },
    ],
    hypotheses: [
      hypothesis('helical halo', 1.02, 0, '', 'Fits within the noise.'),
      hypothesis('cored quadrupole', 1.31, 412.7, '1.4 GHz, azimuth 150°–240°', 'The receding side is too bright at 1.4 GHz.'),
      hypothesis('disc <alone> & "bare"', 41.4, 98214, 'RM on the minor axis', 'No odd asymmetry before the beam.'),
    ],
    lineUp: [
      { kind: 'maps', label: 'P, 1.4 GHz', observed: views(observed), models: [views(helical), views(quadrupole), views(disc)] },
      { kind: 'maps', label: 'RM', observed: { map: observed.rm }, models: [{ map: helical.rm }, { map: quadrupole.rm }, undefined] },
      {
        kind: 'profile', label: 'P round the ring, 1.4 GHz', quantity: 'P', unit: 'Jy/beam',
        observed: { label: 'observed', ...sampleSectors(0.6, 6) },
        models: [0.55, 0.35, 0.05].map((fade) => ({ label: 'model', ...sampleSectors(fade), error: undefined })),
      },
    ],
    legend: ['North is up, east left.', 'Lines: orientation of the magnetic field (polarization angle + 90°), length by P.', 'Hatched: blank.'],
    caveats: ['The distance was held at 10 Mpc.'],
    methods: methodsText({ tolerance: 1e-4, turbulence: true, beam: true, debiased: true, rotationMeasure: 'bands', fit: 'least-squares' }),
    provenance: ['gyrelight rank study.yaml --seed 7'],
  };
}
