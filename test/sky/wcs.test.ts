import { expect, test } from 'vitest';
import { offsetFromPixel, pixelAreaSr, pixelFromSky, skyFromPixel } from '../../src/sky/wcs.ts';
import type { CelestialWcs } from '../../src/sky/wcs-types.ts';
import { wcsPoints } from '../reference/sky.ts';
import { needPython, pythonJson } from '../support/tools.ts';

const step = 10 / 3600;
const square: Omit<CelestialWcs, 'projection'> = {
  raDeg: 150,
  decDeg: 40,
  crpixX: 65,
  crpixY: 65,
  cd: [-step, 0, 0, step],
};
/** Turned, sheared and mirrored, near the pole and across RA 0. */
const turned: Omit<CelestialWcs, 'projection'> = {
  raDeg: 0.2,
  decDeg: -80,
  crpixX: 10.5,
  crpixY: -3.25,
  cd: [3e-3, 1.1e-3, -0.9e-3, 2.5e-3],
};
const projections = ['TAN', 'SIN'] as const;
/** The printed digits of degrees near 150 allow no more. */
const degTolerance = 1e-11;

test('far pixels lie where Calabretta & Greisen 2002 put them', () => {
  for (const projection of projections) {
    const { raDeg, decDeg } = skyFromPixel({ ...square, projection }, 565, 365);
    expect(Math.abs(raDeg - wcsPoints[projection].raDeg)).toBeLessThan(degTolerance);
    expect(Math.abs(decDeg - wcsPoints[projection].decDeg)).toBeLessThan(degTolerance);
  }
});

test('one pixel to smaller x is east where CDELT1 < 0', () => {
  const { north, east } = offsetFromPixel({ ...square, projection: 'SIN' })(64, 65);
  expect(Math.abs((Math.atan2(east, north) * 180) / Math.PI - 90)).toBeLessThan(1e-9);
  expect(skyFromPixel({ ...square, projection: 'SIN' }, 64, 65).raDeg).toBeGreaterThan(150);
});

test('points and offsets of turned matrices are those of astropy', (context) => {
  needPython(context, 'astropy', 'numpy');
  const pixels = [
    [1, 1],
    [10.5, -3.25],
    [300.25, 17],
    [-40, 512],
  ];
  const centre = { raDeg: 359.4, decDeg: -79.6 };
  for (const projection of projections) {
    for (const wcs of [
      { ...square, projection },
      { ...turned, projection },
    ]) {
      const expected = pythonJson(
        `import json, sys
from astropy.wcs import WCS
w, pixels, centre = json.load(sys.stdin)
def make(proj, ra, dec, x, y, cd):
    h = WCS(naxis=2)
    h.wcs.ctype = ['RA---' + proj, 'DEC--' + proj]; h.wcs.crval = [ra, dec]; h.wcs.crpix = [x, y]
    h.wcs.cd = [cd[:2], cd[2:]]
    return h
sky = make(w['projection'], w['raDeg'], w['decDeg'], w['crpixX'], w['crpixY'], w['cd'])
world = sky.all_pix2world(pixels, 1)
# A SIN plane in radians about the centre gives direction cosines.
r = 57.29577951308232
plane = make('SIN', centre['raDeg'], centre['decDeg'], 0, 0, [r, 0, 0, r])
offsets = plane.all_world2pix(world, 0).tolist() if w['raDeg'] < 1 else []
print(json.dumps([world.tolist(), offsets]))`,
        [],
        JSON.stringify([wcs, pixels, centre]),
      ) as [number[][], number[][]];
      const near = wcs.raDeg < 1;
      pixels.forEach(([x, y], k) => {
        const point = skyFromPixel(wcs, x, y);
        expect(Math.abs(point.raDeg - expected[0][k][0])).toBeLessThan(degTolerance);
        expect(Math.abs(point.decDeg - expected[0][k][1])).toBeLessThan(degTolerance);
        const back = pixelFromSky(wcs, point.raDeg, point.decDeg);
        // 1e-11 deg over 3e-3 deg a pixel.
        expect(Math.abs(back.pixelX - x)).toBeLessThan(1e-8);
        expect(Math.abs(back.pixelY - y)).toBeLessThan(1e-8);
        if (!near) return;
        const { north, east } = offsetFromPixel(wcs, centre)(x, y);
        // The SIN plane's pixels count from 0 at CRPIX 0, hence one more.
        expect(Math.abs(east - (expected[1][k][0] + 1))).toBeLessThan(1e-13);
        expect(Math.abs(north - (expected[1][k][1] + 1))).toBeLessThan(1e-13);
      });
    }
  }
});

test('what a projection does not reach is blank, and a flat matrix is refused', () => {
  const sin: CelestialWcs = { ...square, projection: 'SIN', cd: [-1, 0, 0, 1] };
  expect(skyFromPixel(sin, 65 + 58, 65).raDeg).toBeNaN();
  expect(offsetFromPixel(sin)(65 + 58, 65).north).toBeNaN();
  expect(pixelFromSky({ ...sin, projection: 'TAN' }, 330, -40).pixelX).toBeNaN();
  expect(() => pixelFromSky({ ...sin, cd: [1, 2, 2, 4] }, 150, 40)).toThrow(/no inverse/);
});

test('the area of a pixel is its determinant', () => {
  // Ten arcsec squared; 1 arcsec = pi/648000.
  const expected = (10 * (Math.PI / 648000)) ** 2;
  const area = pixelAreaSr({ ...square, projection: 'TAN' });
  expect(Math.abs(area / expected - 1)).toBeLessThan(1e-14);
});
