/*
 * What a careful programmer gets from a C compiler for the work of the integral. The pulse is the cheapest that is smooth
 * enough, w = (1 - u^2)^3 for |u| < 1, so that all is arithmetic the compiler vectorises; a Gaussian would add an
 * exponential and an error function to each term.
 *
 *   gcc -O3 -march=native -ffast-math retarded.c -o retarded -lm
 *   retarded terms TERMS INSTANTS        the history of a sum of delayed terms, Q q(t - d) + W w(t - d) + D w'(t - d), term
 *                                        by term and instant by instant, geometry cached
 *   retarded elements ELEMENTS INSTANTS  E and B of a ring of current elements, element by element, at one observer
 *   retarded sampled ELEMENTS INSTANTS   the same with the pulse in a table, as any waveform can be
 *
 * prints {"seconds", "work": terms or elements x instants, "checksum"}
 */
#define _POSIX_C_SOURCE 199309L
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

typedef struct {
  long count;
  double *delay, *charge, *current, *slope;
} Terms;

static double seconds_now(void) {
  struct timespec t;
  clock_gettime(CLOCK_MONOTONIC, &t);
  return t.tv_sec + 1e-9 * t.tv_nsec;
}

static double *numbers(long count) {
  double *block = aligned_alloc(64, (count * sizeof(double) / 64 + 1) * 64);
  if (!block) exit(3);
  return block;
}

/* q, w and w' at u, in units of the pulse's half length: 0 before it, and q stays after it. */
typedef struct {
  double q, w, slope;
} Pulse;

static inline Pulse pulse_at(double u) {
  u = u > 1 ? 1 : u;
  u = u < -1 ? -1 : u;
  const double square = u * u, bell = 1 - square, bell2 = bell * bell;
  return (Pulse){16.0 / 35 + u * (1 + square * (-1 + square * (0.6 - square / 7))), bell2 * bell, -6 * u * bell2};
}

__attribute__((noinline)) static double field_at(const Terms *terms, double u0) {
  const double *restrict delay = terms->delay, *restrict charge = terms->charge;
  const double *restrict current = terms->current, *restrict slope = terms->slope;
  double sum = 0;
  for (long n = 0; n < terms->count; n++) {
    const Pulse pulse = pulse_at(u0 - delay[n]);
    sum += charge[n] * pulse.q + current[n] * pulse.w + slope[n] * pulse.slope;
  }
  return sum;
}

static double history_of_terms(long size, long instants, double *taken) {
  Terms terms = {size, numbers(size), numbers(size), numbers(size), numbers(size)};
  for (long n = 0; n < size; n++) {
    terms.delay[n] = 1e-3 * (n * 731 % 600);
    terms.charge[n] = n % 3;
    terms.current[n] = n % 5;
    terms.slope[n] = n % 7;
  }
  double checksum = field_at(&terms, 0.5); /* warms caches and the clock up */
  const double start = seconds_now();
  for (long n = 0; n < instants; n++) checksum += field_at(&terms, -1 + 3.0 * n / instants);
  *taken = seconds_now() - start;
  return checksum;
}

/* Places and moments per ampere, one array for each component. */
typedef struct {
  long count;
  double *x, *y, *z, *dx, *dy, *dz;
} Elements;

typedef struct {
  double ex, ey, ez, bx, by, bz;
} Field;

/* By Hermite's formula between samples of q, w and w' and of their derivatives times the step: six numbers a sample. */
enum { STEPS = 1024 };

static inline Pulse sampled_at(const double *restrict table, double u) {
  double place = (u + 1) * (STEPS / 2.0);
  place = place > STEPS - 1e-9 ? STEPS - 1e-9 : place;
  place = place < 0 ? 0 : place;
  const int step = (int)place;
  const double *at = table + 6 * step;
  const double t = place - step, t2 = t * t;
  const double to = t2 * (3 - 2 * t), from = 1 - to, end = t2 * (t - 1), begin = end - t2 + t;
  return (Pulse){from * at[0] + begin * at[1] + to * at[6] + end * at[7],
                 from * at[2] + begin * at[3] + to * at[8] + end * at[9],
                 from * at[4] + begin * at[5] + to * at[10] + end * at[11]};
}

static double *table_of_pulse(void) {
  double *table = numbers(6 * (STEPS + 1));
  const double step = 2.0 / STEPS;
  for (int n = 0; n <= STEPS; n++) {
    const double u = -1 + step * n, bell = 1 - u * u;
    const Pulse pulse = pulse_at(u);
    const double row[6] = {pulse.q,           step * pulse.w, pulse.w, step * pulse.slope,
                           pulse.slope, step * (-6 * bell * bell + 24 * u * u * bell)};
    memcpy(table + 6 * n, row, sizeof row);
  }
  return table;
}

/*
 * In units of 1/(4 pi eps) and mu/(4 pi), with the speed of waves 1, R = observer - element and n = R/|R|:
 *   E = [3 n (n.d) - d] (q/R^3 + w/R^2) + [n (n.d) - d] w'/R,   B = (d x n) (w/R^2 + w'/R)
 * table: where the pulse is read; none: it is computed
 */
static inline __attribute__((always_inline)) Field sum_of(const Elements *elements, const double *table, double ox,
                                                          double oy, double oz, double t) {
  const double *restrict xs = elements->x, *restrict ys = elements->y, *restrict zs = elements->z;
  const double *restrict dxs = elements->dx, *restrict dys = elements->dy, *restrict dzs = elements->dz;
  double ex = 0, ey = 0, ez = 0, bx = 0, by = 0, bz = 0;
  for (long n = 0; n < elements->count; n++) {
    const double x = ox - xs[n], y = oy - ys[n], z = oz - zs[n], dx = dxs[n], dy = dys[n], dz = dzs[n];
    const double r = sqrt(x * x + y * y + z * z), per_r = 1 / r;
    const Pulse pulse = table ? sampled_at(table, t - r) : pulse_at(t - r);
    const double nx = x * per_r, ny = y * per_r, nz = z * per_r, along = nx * dx + ny * dy + nz * dz;
    const double near = (pulse.q * per_r + pulse.w) * per_r * per_r, far = pulse.slope * per_r;
    const double radial = along * (3 * near + far), drawn = near + far, around = (pulse.w * per_r + pulse.slope) * per_r;
    ex += radial * nx - drawn * dx;
    ey += radial * ny - drawn * dy;
    ez += radial * nz - drawn * dz;
    bx += around * (dy * nz - dz * ny);
    by += around * (dz * nx - dx * nz);
    bz += around * (dx * ny - dy * nx);
  }
  return (Field){ex, ey, ez, bx, by, bz};
}

static const double OBSERVER[3] = {0.3, 0.4, 1.5};

__attribute__((noinline)) static Field field_of(const Elements *elements, double t) {
  return sum_of(elements, NULL, OBSERVER[0], OBSERVER[1], OBSERVER[2], t);
}

__attribute__((noinline)) static Field sampled_field_of(const Elements *elements, const double *table, double t) {
  return sum_of(elements, table, OBSERVER[0], OBSERVER[1], OBSERVER[2], t);
}

static double sums_of_elements(long size, long instants, const double *table, double *taken) {
  Elements ring = {size, numbers(size), numbers(size), numbers(size), numbers(size), numbers(size), numbers(size)};
  for (long n = 0; n < size; n++) {
    const double angle = 6.283185307179586 * (n + 0.5) / size;
    ring.x[n] = cos(angle);
    ring.y[n] = sin(angle);
    ring.z[n] = 0;
    ring.dx[n] = -sin(angle) / size;
    ring.dy[n] = cos(angle) / size;
    ring.dz[n] = 0;
  }
  double checksum = table ? sampled_field_of(&ring, table, 1.6).bz : field_of(&ring, 1.6).bz;
  const double start = seconds_now();
  for (long n = 0; n < instants; n++) {
    const double t = 1 + 1.5 * n / instants;
    const Field f = table ? sampled_field_of(&ring, table, t) : field_of(&ring, t);
    checksum += f.ex + f.ey + f.ez + f.bx + f.by + f.bz;
  }
  *taken = seconds_now() - start;
  return checksum;
}

int main(int count, char **arguments) {
  if (count != 4) return 2;
  const long size = atol(arguments[2]), instants = atol(arguments[3]);
  const int sampled = strcmp(arguments[1], "sampled") == 0;
  double taken;
  const double checksum = sampled || strcmp(arguments[1], "elements") == 0
                              ? sums_of_elements(size, instants, sampled ? table_of_pulse() : NULL, &taken)
                              : history_of_terms(size, instants, &taken);
  printf("{\"seconds\": %.9g, \"work\": %ld, \"checksum\": %.17g}\n", taken, size * instants, checksum);
  return 0;
}
