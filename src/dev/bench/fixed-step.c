/*
 * The benchmark's plain reference: test/reference/a-spiral-quadrupole.yaml followed with the
 * midpoint rule in equal steps, written by hand for this one scene. Pixels side by side in loops
 * that a compiler turns into vector code (cc -O3 -march=native -fno-math-errno -fno-trapping-math).
 *
 * usage: fixed-step SIDE STEP_KPC SIN_I COS_I STEPS OUT WAVELENGTH_SQUARED...
 * prints seconds of CPU; OUT receives I, Q, U as double [channel][3][pixel], in units of C B^q kpc.
 */
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#define LANES 64

static inline double from_bits(int64_t bits) { double x; memcpy(&x, &bits, 8); return x; }
static inline int64_t to_bits(double x) { int64_t b; memcpy(&b, &x, 8); return b; }

/* e^x for -700 < x < 700, about 1e-12. */
static inline double exp_fast(double x) {
  const double shift = 6755399441055744.0;
  x = x < -700 ? -700 : x;
  double t = x * 1.4426950408889634 + shift, k = t - shift;
  double r = x - k * 0.6931471803691238 - k * 1.9082149292705877e-10;
  double p = 2.7557319e-6;
  p = p * r + 2.4801587e-5; p = p * r + 1.98412698413e-4; p = p * r + 1.38888888889e-3; p = p * r + 8.33333333333333e-3;
  p = p * r + 4.16666666666667e-2; p = p * r + 1.66666666666667e-1; p = p * r + 0.5; p = p * r + 1; p = p * r + 1;
  return from_bits(to_bits(p) + (int64_t)((uint64_t)to_bits(t) << 52));
}

/* ln x for positive normal x. */
static inline double log_fast(double x) {
  int64_t b = to_bits(x), e = (int64_t)((uint64_t)(b - 0x3fe6a09e667f3bcdLL) >> 52);
  double m = from_bits(b - (int64_t)((uint64_t)e << 52));
  double k = from_bits((e & 0xfff) | 0x4330000000000000LL) - 4503599627370496.0;
  k = k >= 2048 ? k - 4096 : k;
  double s = (m - 1) / (m + 1), z = s * s;
  double p = 0.14618452;
  p = p * z + 0.1533155; p = p * z + 0.18182894; p = p * z + 0.22222211; p = p * z + 0.285714286; p = p * z + 0.4; p = p * z + 0.666666666666667; p = p * z + 2;
  return k * 0.6931471805599453 + s * p;
}

static inline void sincos_fast(double x, double *sn, double *cs) {
  const double shift = 6755399441055744.0;
  double t = x * 0.6366197723675814 + shift, n = t - shift;
  double r = x - n * 1.5707963267341256 - n * 6.077100506303966e-11, z = r * r;
  double s = r + r * z * (-1.6666666666666666e-1 + z * (8.333333333330943e-3 + z * (-1.984126983675e-4 + z * (2.7557316e-6 - z * 2.505113e-8))));
  double c = 1 - 0.5 * z + z * z * (4.1666666666666664e-2 + z * (-1.38888888888874e-3 + z * (2.48015872988e-5 + z * (-2.7557317e-7 + z * 2.0876e-9))));
  int64_t q = to_bits(t);
  double a = (q & 1) ? c : s, b = (q & 1) ? s : c;
  *sn = (q & 2) ? -a : a;
  *cs = ((q + 1) & 2) ? -b : b;
}

int main(int argc, char **argv) {
  const int side = atoi(argv[1]), steps = atoi(argv[5]), channels = argc - 7;
  const double pitch = -20 * 3.141592653589793 / 180, pixel = atof(argv[2]), si = atof(argv[3]), ci = atof(argv[4]);
  const double R = 15, H = 6, B = 8, sp = sin(pitch), cp = cos(pitch), Rb = 8, ri = 1, h0 = 0.6, hc = 4;
  const double core = 2, ref = 5, K = 2 * pow(ref * ref + core * core, 2.5) / ref, depth = 0.811901164165e3 * 0.03;
  const double pa = 25 * 3.141592653589793 / 180, spa = sin(pa), cpa = cos(pa);
  const int pixels = side * side;
  double *out = calloc((size_t)channels * 3 * pixels, sizeof(double));
  double l2[256];
  for (int c = 0; c < channels; c++) l2[c] = 2 * atof(argv[7 + c]);
  clock_t start = clock();
  for (int block = 0; block < pixels; block += LANES) {
    double X[LANES], M[LANES], far[LANES], near[LANES], ds[LANES], phi[LANES], jt[LANES], jc[LANES], js[LANES], turn[LANES];
    double sum[256][3][LANES];
    memset(sum, 0, sizeof(double) * 3 * LANES * channels);
    for (int l = 0; l < LANES; l++) {
      int p = block + l < pixels ? block + l : pixels - 1;
      double north = (p / side - (side - 1) / 2.0) * pixel, east = ((side - 1) / 2.0 - p % side) * pixel;
      X[l] = north * cpa + east * spa; M[l] = east * cpa - north * spa;
      double sq = R * R - X[l] * X[l], half = sq > 0 ? sqrt(sq) / fmax(si, 1e-9) : 0, mid = M[l] * ci / fmax(si, 1e-9);
      double hz = H / fmax(ci, 1e-9), mz = -M[l] * si / fmax(ci, 1e-9);
      far[l] = fmax(mid - half, mz - hz); near[l] = fmin(mid + half, mz + hz);
      if (sq <= 0 || near[l] < far[l]) near[l] = far[l] = 0;
      ds[l] = (near[l] - far[l]) / steps; phi[l] = 0;
    }
    for (int k = 0; k < steps; k++) {
      for (int l = 0; l < LANES; l++) {
        double s = near[l] - (k + 0.5) * ds[l], x = X[l], y = M[l] * ci - s * si, z = M[l] * si + s * ci, az = fabs(z);
        double r2 = x * x + y * y + 1e-24, r = sqrt(r2), over = 1 / r;
        double inner = exp_fast(-r2 / (ri * ri)), fall = exp_fast(-r / Rb), g = (1 - inner) * fall, dg = 2 * r / (ri * ri) * inner * fall - g / Rb;
        double e = exp_fast(-2 / h0 * az), q = 1 / (1 + e), th = copysign((1 - e) * q, z), sech2 = 4 * e * q * q;
        double close = exp_fast(-z * z / (hc * hc)), T = h0 * th * close, dT = sech2 * close - 2 * z / (hc * hc) * T;
        double D = 1 / (r2 + z * z + core * core), D2 = D * D * sqrt(D), D3 = D2 * D;
        double br = B * sp * g * dT + K * r * (D2 - 5 * z * z * D3), bp = B * cp * g * sech2;
        double bz = -B * sp * T * (g * over + dg) - K * z * (2 * D2 - 5 * r2 * D3);
        double bx = (br * x - bp * y) * over, by = (br * y + bp * x) * over;
        double along = bz * ci - by * si, minor = by * ci + bz * si;
        double e1 = exp_fast(-2 * az), q1 = 1 / (1 + e1), ne = exp_fast(-r / 10) * 4 * e1 * q1 * q1;
        double cr = 1e-5 * exp_fast(-r / 6 - az / 1.5), b2 = bx * bx + minor * minor + 1e-30, power = exp_fast(-0.05 * log_fast(b2)) * cr * ds[l];
        double rate = depth * ne * along * ds[l];
        jt[l] = power * b2; jc[l] = power * (minor * minor - bx * bx); js[l] = -2 * power * bx * minor;
        turn[l] = phi[l] + 0.5 * rate; phi[l] += rate;
      }
      for (int c = 0; c < channels; c++)
        for (int l = 0; l < LANES; l++) {
          double sn, cs;
          sincos_fast(l2[c] * turn[l], &sn, &cs);
          sum[c][0][l] += jt[l]; sum[c][1][l] += cs * jc[l] - sn * js[l]; sum[c][2][l] += sn * jc[l] + cs * js[l];
        }
    }
    for (int c = 0; c < channels; c++)
      for (int v = 0; v < 3; v++)
        for (int l = 0; l < LANES && block + l < pixels; l++) out[((size_t)c * 3 + v) * pixels + block + l] = sum[c][v][l];
  }
  printf("%.6f\n", (double)(clock() - start) / CLOCKS_PER_SEC);
  FILE *f = fopen(argv[6], "wb");
  fwrite(out, sizeof(double), (size_t)channels * 3 * pixels, f);
  return fclose(f);
}
