// The step of shared/kernels/assembly/macrospin.ts (collinear, without settling) in C++, to measure the kernel against: same generator,
// same transform, same scheme, WIDTH trials side by side. Prints nanoseconds for one step of one trial, best of several runs.
#include <algorithm>
#include <ctime>
#include <cmath>
#include <cstdint>
#include <cstdio>
#ifndef WIDTH
#define WIDTH 4
#endif
typedef float F __attribute__((vector_size(4 * WIDTH)));
typedef uint32_t U __attribute__((vector_size(4 * WIDTH)));
typedef int32_t I __attribute__((vector_size(4 * WIDTH)));

static inline F root(F x) { F y; for (int k = 0; k < WIDTH; k++) y[k] = __builtin_sqrtf(x[k]); return y; }
static inline U rotl(U a, int n) { return (a << n) | (a >> (32 - n)); }
static inline F real(I a) { return __builtin_convertvector(a, F); }

static inline F logarithm(F p) {
  U bits = (U)p;
  I e = (I)(bits >> 23) - 126;
  F m = (F)((bits & 0x007FFFFF) | 0x3F000000);
  I low = m <= 0.70710678f;
  e += low;
  F x = m + (F)((I)m & low) - 1.0f, z = x * x;
  F y = 7.0376836292e-2f * x - 1.1514610310e-1f;
  y = y * x + 1.1676998740e-1f; y = y * x - 1.2420140846e-1f; y = y * x + 1.4249322787e-1f; y = y * x - 1.6668057665e-1f;
  y = y * x + 2.0000714765e-1f; y = y * x - 2.4999993993e-1f; y = (y * x + 3.3333331174e-1f) * x * z;
  F n = real(e);
  return x + (y + n * -2.12194440e-4f - z * 0.5f) + n * 0.693359375f;
}

static inline F normal(U word) {
  I sign = (I)word >> 31, size = (I)word ^ sign;
  F q = (real(size) + 0.5f) * 2.3283064365386963e-10f, p = (real(0x7FFFFFFF - size) + 0.5f) * 2.3283064365386963e-10f;
  F r = 0.180625f - q * q;
  F a = q * (((59.109374720f * r + 159.29113202f) * r + 50.434271938f) * r + 3.3871327179f);
  F b = ((67.187563600f * r + 78.757757664f) * r + 17.895169469f) * r + 1.0f;
  F t = root(-logarithm(p)) - 1.6f;
  F c = ((0.17023821103f * t + 1.3067284816f) * t + 2.7568153900f) * t + 1.4234372777f;
  F d = (0.12021132975f * t + 0.73700164250f) * t + 1.0f;
  I central = q <= 0.425f;
  F value = (central ? a : c) / (central ? b : d);
  return (F)((I)value ^ (sign & int32_t(0x80000000)));
}

struct State { F x, y, z; U s0, s1, s2, s3; };

static inline F draw(State &s) {
  U word = rotl(s.s0 + s.s3, 7) + s.s0, t = s.s1 << 9;
  s.s2 ^= s.s0; s.s3 ^= s.s1; s.s1 ^= s.s2; s.s0 ^= s.s3; s.s2 ^= t; s.s3 = rotl(s.s3, 11);
  return normal(word);
}

static int steps(State &s, int count, float h, float alpha, float a, float noise) {
  int near = 0;
  const float nodes[4] = {0, h / 2, h / 2, h}, weights[4] = {h / 6, h / 3, h / 3, h / 6};
  for (int k = 0; k < count; k++) {
    F ax = noise * draw(s), ay = noise * draw(s), az = noise * draw(s);
    F kx{}, ky{}, kz{}, sx = s.x, sy = s.y, sz = s.z;
    for (int stage = 0; stage < 4; stage++) {
      F ux = s.x + nodes[stage] * kx, uy = s.y + nodes[stage] * ky, uz = s.z + nodes[stage] * kz;
      F fx = ax + a * uy, fy = ay - a * ux, fz = az + uz;
      F cx = uz * fy - uy * fz, cy = ux * fz - uz * fx, cz = uy * fx - ux * fy;
      kx = cx + alpha * (uy * cz - uz * cy); ky = cy + alpha * (uz * cx - ux * cz); kz = cz + alpha * (ux * cy - uy * cx);
      sx += weights[stage] * kx; sy += weights[stage] * ky; sz += weights[stage] * kz;
    }
    F norm = 1.0f / root(sx * sx + sy * sy + sz * sz), before = s.z;
    s.x = sx * norm; s.y = sy * norm; s.z = sz * norm;
    I reach = (before * s.z < 0.001f) | (s.z <= 0.0f);
    for (int lane = 0; lane < WIDTH; lane++) near += reach[lane] != 0;
  }
  return near;
}

int main() {
  State s{};
  for (int k = 0; k < WIDTH; k++) { s.x[k] = 0.1f; s.z[k] = std::sqrt(0.99f); s.s0[k] = 1 + k; s.s1[k] = 77 + 3 * k; s.s2[k] = 1234567; s.s3[k] = 89 * k; }
  const int count = 100000;
  double best = 1e9;
  long sink = 0;
  for (int run = 0; run < 25; run++) {
    std::clock_t began = std::clock();
    sink += steps(s, count, 0.25f, 0.01f, -0.02f, 0.03f);
    double took = double(std::clock() - began) * 1e9 / CLOCKS_PER_SEC;
    best = std::min(best, took / (double(count) * WIDTH));
  }
  std::printf("%.4f %ld\n", best, sink);
}
