import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { inFolder, needPython, pythonJson, runPython } from '../support/tools.ts';
import { repository } from './run.ts';

/** I, Q and U cubes of 1024 x 1024 pixels and 256 channels: a screen whose depth grows with the row, p = 1/10. */
const makeCubes = `
import sys, numpy as np
from astropy.io import fits
n, channels = 1024, 256
nu = np.linspace(1.0e9, 2.0e9, channels); l2 = (299792458.0/nu)**2
rm = np.linspace(-200, 200, n)
for s, wave in (('I', lambda x: 10 + 0*x), ('Q', np.cos), ('U', np.sin)):
    h = fits.Header(); h['SIMPLE']=True; h['BITPIX']=-32; h['NAXIS']=3; h['NAXIS1']=n; h['NAXIS2']=n; h['NAXIS3']=channels
    h['CTYPE1']='RA---SIN'; h['CTYPE2']='DEC--SIN'; h['CTYPE3']='FREQ'; h['CRPIX1']=512.; h['CRPIX2']=512.; h['CRPIX3']=1.
    h['CRVAL1']=150.; h['CRVAL2']=20.; h['CRVAL3']=nu[0]; h['CDELT1']=-2/3600; h['CDELT2']=2/3600; h['CDELT3']=nu[1]-nu[0]; h['CUNIT3']='Hz'
    h['BUNIT']='Jy/beam'; h['BMAJ']=8/3600; h['BMIN']=8/3600; h['BPA']=0.; h['QUANTITY']=s
    hdu = fits.StreamingHDU(f'{sys.argv[1]}/{s}.fits', h)
    for k in range(channels):
        hdu.write(np.repeat(wave(2*(0.3+rm*l2[k]))[:, None], n, 1).astype('>f4'))
    hdu.close()
`;

const runMeasured = `
import sys, json, resource, subprocess, numpy as np
from astropy.io import fits
folder, program, *flags = sys.argv[1:]
r = subprocess.run(['node', program, 'measure', 'I.fits', 'Q.fits', 'U.fits', '--inclination', '40 deg', '--position-angle', '0 deg', '--distance', '10 Mpc',
  '--depths', '-400 rad/m^2,400 rad/m^2,8 rad/m^2', '--noise', '10 mJy/beam', '--convention', 'IAU', '--laws', 'integrated', *flags, '--out', 'm'], cwd=folder, capture_output=True, text=True)
laws = [line for line in open(folder+'/m/laws.csv') if line.startswith('integrated')] if r.returncode == 0 else []
rm = fits.getdata(folder+'/m/RM.fits') if r.returncode == 0 else np.zeros((1024, 1024))
with fits.open(folder+'/m/faraday-spectrum.fits', memmap=True) as f: shape = f[0].data.shape; sums = f.verify('exception') is None
print(json.dumps(dict(status=r.returncode, err=r.stderr, kilobytes=resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss,
  worst=float(np.abs(rm - np.linspace(-200, 200, 1024)[:, None]).max()), shape=list(shape), sums=sums, laws=len(laws))))
`;

for (const [how, flags, allowed] of [
  // The parabola errs by 0.2 % of the resolution of 64 rad m^-2.
  ['as they are', [], 0.2],
  // A beam of 8 arcsec becomes one of 12: the edges of the map lose light and a little of their depth.
  ['smoothed plane by plane', ['--smooth', '12 arcsec'], 2],
] as const) {
  it(`takes the Faraday spectra and laws of 1024 x 1024 x 256 in bounded memory, with progress: ${how}`, (context) => {
    needPython(context, 'astropy', 'numpy');
    expect(existsSync(repository('dist/gyrelight.js'))).toBe(true);
    inFolder((folder) => {
      runPython(makeCubes, [folder]);
      const found = pythonJson(runMeasured, [folder, join(repository('dist'), 'gyrelight.js'), ...flags]) as { status: number; err: string; kilobytes: number; worst: number; shape: number[]; sums: boolean; laws: number };
      console.log(found.kilobytes, found.err.split('\n').slice(-3).join('\n'));
      expect(found.status, found.err).toBe(0);
      expect(found.err).toMatch(/Faraday spectra {2}\d+ % {2}\d+\/1024 rows/);
      expect(found.shape).toEqual([101, 1024, 1024]);
      expect(found.sums).toBe(true);
      expect(found.laws).toBeGreaterThan(20);
      // The three cubes alone are 3.2 GB as they lie, 6.4 GB as doubles; a dozen maps are 0.1 GB.
      expect(found.kilobytes).toBeLessThan(900_000);
      expect(found.worst).toBeLessThan(allowed);
    });
  }, 3_600_000);
}
