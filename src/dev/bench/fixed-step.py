# The benchmark's numpy reference: what fixed-step.c does, in blocks of pixels that stay in cache.
# usage: fixed-step.py SIDE STEP_KPC SIN_I COS_I STEPS OUT WAVELENGTH_SQUARED...; prints seconds of CPU
import sys
import time
import numpy as np

side, pixel, si, ci, steps, out = int(sys.argv[1]), float(sys.argv[2]), float(sys.argv[3]), float(sys.argv[4]), int(sys.argv[5]), sys.argv[6]
turns = [2 * float(text) for text in sys.argv[7:]]
R, H, B, Rb, ri, h0, hc, core, ref = 15.0, 6.0, 8.0, 8.0, 1.0, 0.6, 4.0, 2.0, 5.0
pitch, pa = np.radians(-20), np.radians(25)
sp, cp = np.sin(pitch), np.cos(pitch)
K = 2 * (ref * ref + core * core) ** 2.5 / ref
depth = 0.811901164165e3 * 0.03
maps = np.zeros((len(turns), 3, side * side))
block = 2048
start = time.process_time()
with np.errstate(all="ignore"):
    for first in range(0, side * side, block):
        p = np.arange(first, min(first + block, side * side))
        north, east = (p // side - (side - 1) / 2) * pixel, ((side - 1) / 2 - p % side) * pixel
        x, m = north * np.cos(pa) + east * np.sin(pa), east * np.cos(pa) - north * np.sin(pa)
        square = R * R - x * x
        half, mid = np.sqrt(np.maximum(square, 0)) / max(si, 1e-9), m * ci / max(si, 1e-9)
        hz, mz = H / max(ci, 1e-9), -m * si / max(ci, 1e-9)
        far, near = np.maximum(mid - half, mz - hz), np.minimum(mid + half, mz + hz)
        hit = (square > 0) & (near > far)
        p, x, m, far, near = p[hit], x[hit], m[hit], far[hit], near[hit]
        ds, phi, x2 = (near - far) / steps, np.zeros(len(p)), x * x + 1e-24
        sums = np.zeros((len(turns), 3, len(p)))
        for k in range(steps):
            s = near - (k + 0.5) * ds
            y, z = m * ci - s * si, m * si + s * ci
            az, z2 = np.abs(z), z * z
            r2 = x2 + y * y
            r = np.sqrt(r2)
            over = 1 / r
            inner, fall = np.exp(-r2 / (ri * ri)), np.exp(-r / Rb)
            g = (1 - inner) * fall
            dg = 2 * r / (ri * ri) * inner * fall - g / Rb
            th = np.tanh(z / h0)
            sech2 = 1 - th * th
            close = np.exp(-z2 / (hc * hc))
            T = h0 * th * close
            dT = sech2 * close - 2 * z / (hc * hc) * T
            D = 1 / (r2 + z2 + core * core)
            D2 = D * D * np.sqrt(D)
            D3 = D2 * D
            br = B * sp * g * dT + K * r * (D2 - 5 * z2 * D3)
            bp = B * cp * g * sech2
            bz = -B * sp * T * (g * over + dg) - K * z * (2 * D2 - 5 * r2 * D3)
            bx, by = (br * x - bp * y) * over, (br * y + bp * x) * over
            along, minor = bz * ci - by * si, by * ci + bz * si
            tz = np.tanh(z)
            rate = depth * np.exp(-r / 10) * (1 - tz * tz) * along * ds
            b2 = bx * bx + minor * minor + 1e-30
            power = b2 ** -0.05 * 1e-5 * np.exp(-r / 6 - az / 1.5) * ds
            major, diagonal = power * (minor * minor - bx * bx), -2 * power * bx * minor
            turn = phi + 0.5 * rate
            phi += rate
            total = power * b2
            for c, twice in enumerate(turns):
                angle = twice * turn
                cosine, sine = np.cos(angle), np.sin(angle)
                sums[c, 0] += total
                sums[c, 1] += cosine * major - sine * diagonal
                sums[c, 2] += sine * major + cosine * diagonal
        maps[:, :, p] = sums
print(f"{time.process_time() - start:.6f}")
maps.tofile(out)
