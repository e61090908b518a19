/*
 * What a careful programmer gets from a C compiler on this machine, to measure the WebAssembly kernel against: Yee's
 * update of a cube with uniform coefficient, in single precision, vectorised by the compiler and spread over threads.
 * The loops say with `ivdep` that fields do not overlap, without which gcc does not vectorise them.
 *
 *   gcc -O3 -march=native -ffast-math -fopenmp yee.c -o yee
 *   yee step CELLS STEPS THREADS    {"seconds", "cpuSeconds", "rate": million cell updates a second, "checksum"}
 *   yee triad BYTES REPEATS THREADS {"seconds": best, "rate": GB/s at 12 bytes an element}
 */
#define _GNU_SOURCE
#include <omp.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

enum { EX, EY, EZ, HX, HY, HZ, FIELDS };

typedef struct {
  long cells, row, plane; /* cells an edge; floats from one row, and one plane, to the next */
  float coefficient;
  float *field[FIELDS];
} Lattice;

static double clock_of(clockid_t which) {
  struct timespec t;
  clock_gettime(which, &t);
  return t.tv_sec + 1e-9 * t.tv_nsec;
}

/* Rows with 4 floats of padding a side, a ghost row and a ghost plane; fields start 704 bytes apart within a page. */
static Lattice make_lattice(long cells) {
  Lattice g = {.cells = cells, .row = cells + 8, .coefficient = 0.55f};
  g.plane = g.row * (cells + 2);
  const long floats = g.plane * (cells + 2) + 4096;
  for (int f = 0; f < FIELDS; f++) {
    char *block = aligned_alloc(4096, (floats * sizeof(float) / 4096 + 1) * 4096);
    if (!block) exit(3);
    float *start = (float *)(block + 704 * f);
    /* Touched by the threads that will work on it. */
#pragma omp parallel for schedule(static)
    for (long k = 0; k < cells + 2; k++) memset(start + k * g.plane, 0, g.plane * sizeof(float));
    g.field[f] = start + g.plane + g.row + 4;
  }
  uint32_t seed = 2463534242u;
  for (int f = 0; f < FIELDS; f++)
    for (long k = 0; k < cells; k++)
      for (long j = 0; j < cells; j++)
        for (long i = 0; i < cells; i++) {
          seed ^= seed << 13, seed ^= seed >> 17, seed ^= seed << 5;
          g.field[f][k * g.plane + j * g.row + i] = (float)(int32_t)seed / 2147483648.0f;
        }
  return g;
}

/* e ← e + c·(own − one back), Ampère. */
static void electric(const Lattice *g) {
  const long row = g->row, plane = g->plane, n = g->cells;
  const float c = g->coefficient;
  float *restrict ex = g->field[EX], *restrict ey = g->field[EY], *restrict ez = g->field[EZ];
  const float *restrict hx = g->field[HX], *restrict hy = g->field[HY], *restrict hz = g->field[HZ];
#pragma omp parallel for schedule(static)
  for (long k = 0; k < n; k++)
    for (long j = 0; j < n; j++) {
      const long from = k * plane + j * row;
#pragma GCC ivdep
      for (long p = from; p < from + n; p++) {
        ex[p] += c * ((hz[p] - hz[p - row]) - (hy[p] - hy[p - plane]));
        ey[p] += c * ((hx[p] - hx[p - plane]) - (hz[p] - hz[p - 1]));
        ez[p] += c * ((hy[p] - hy[p - 1]) - (hx[p] - hx[p - row]));
      }
    }
}

/* h ← h + c·(own − one ahead), Faraday. */
static void magnetic(const Lattice *g) {
  const long row = g->row, plane = g->plane, n = g->cells;
  const float c = g->coefficient;
  const float *restrict ex = g->field[EX], *restrict ey = g->field[EY], *restrict ez = g->field[EZ];
  float *restrict hx = g->field[HX], *restrict hy = g->field[HY], *restrict hz = g->field[HZ];
#pragma omp parallel for schedule(static)
  for (long k = 0; k < n; k++)
    for (long j = 0; j < n; j++) {
      const long from = k * plane + j * row;
#pragma GCC ivdep
      for (long p = from; p < from + n; p++) {
        hx[p] += c * ((ez[p] - ez[p + row]) - (ey[p] - ey[p + plane]));
        hy[p] += c * ((ex[p] - ex[p + plane]) - (ez[p] - ez[p + 1]));
        hz[p] += c * ((ey[p] - ey[p + 1]) - (ex[p] - ex[p + row]));
      }
    }
}

static void march(long cells, int steps) {
  const Lattice g = make_lattice(cells);
  electric(&g);
  magnetic(&g);
  const double cpu = clock_of(CLOCK_PROCESS_CPUTIME_ID), wall = clock_of(CLOCK_MONOTONIC);
  for (int n = 0; n < steps; n++) {
    electric(&g);
    magnetic(&g);
  }
  const double seconds = clock_of(CLOCK_MONOTONIC) - wall;
  const double cpu_seconds = clock_of(CLOCK_PROCESS_CPUTIME_ID) - cpu;
  double checksum = 0;
  for (int f = 0; f < FIELDS; f++) checksum += g.field[f][cells / 2 * g.plane + cells / 2 * g.row + cells / 3];
  printf("{\"seconds\": %.6f, \"cpuSeconds\": %.6f, \"rate\": %.2f, \"checksum\": %.9g}\n", seconds, cpu_seconds,
         1e-6 * cells * cells * cells * steps / seconds, checksum);
}

/* a ← b + s·c: how fast memory is, 12 bytes an element. */
static void triad(long bytes, int repeats) {
  const long n = bytes / 12;
  float *a = malloc(n * sizeof(float)), *b = malloc(n * sizeof(float)), *c = malloc(n * sizeof(float));
  if (!a || !b || !c) exit(3);
#pragma omp parallel for schedule(static)
  for (long i = 0; i < n; i++) a[i] = 0, b[i] = 1, c[i] = 2;
  double best = 1e9;
  for (int r = 0; r < repeats; r++) {
    const double from = clock_of(CLOCK_MONOTONIC);
    const float s = 3.0f + (float)r;
#pragma omp parallel for schedule(static)
    for (long i = 0; i < n; i++) a[i] = b[i] + s * c[i];
    const double seconds = clock_of(CLOCK_MONOTONIC) - from;
    if (seconds < best) best = seconds;
  }
  printf("{\"seconds\": %.6f, \"rate\": %.3f, \"checksum\": %g}\n", best, 12e-9 * n / best, a[n / 2]);
}

int main(int count, char **words) {
  if (count != 5) return 2;
  omp_set_num_threads(atoi(words[4]));
  if (!strcmp(words[1], "triad")) triad(atol(words[2]), atoi(words[3]));
  else march(atol(words[2]), atoi(words[3]));
  return 0;
}
