/*
 * What a careful programmer gets from a C compiler for the work that delay spreading takes the place of: the history of a
 * sum of delayed terms, Q q(t - d) + W w(t - d) + D w'(t - d), term by term and instant by instant, geometry cached. The
 * pulse is the cheapest that is smooth enough, w = (1 - u^2)^3 for |u| < 1, so that all is arithmetic the compiler
 * vectorises; a Gaussian would add an exponential and an error function to each term.
 *
 *   gcc -O3 -march=native -ffast-math retarded.c -o retarded -lm
 *   retarded TERMS INSTANTS    {"seconds", "work": terms x instants, "checksum"}
 */
#define _POSIX_C_SOURCE 199309L
#include <stdio.h>
#include <stdlib.h>
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

/* u in units of the pulse's half length; q, w and w' are 0 before it, and q stays after it. */
__attribute__((noinline)) static double field_at(const Terms *terms, double u0) {
  const double *restrict delay = terms->delay, *restrict charge = terms->charge;
  const double *restrict current = terms->current, *restrict slope = terms->slope;
  double sum = 0;
  for (long n = 0; n < terms->count; n++) {
    double u = u0 - delay[n];
    u = u > 1 ? 1 : u;
    u = u < -1 ? -1 : u;
    const double square = u * u, bell = 1 - square, bell2 = bell * bell;
    const double q = 16.0 / 35 + u * (1 + square * (-1 + square * (0.6 - square / 7)));
    sum += charge[n] * q + current[n] * bell2 * bell - 6 * slope[n] * u * bell2;
  }
  return sum;
}

int main(int count, char **arguments) {
  if (count != 3) return 2;
  const long size = atol(arguments[1]), instants = atol(arguments[2]);
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
  const double taken = seconds_now() - start;
  printf("{\"seconds\": %.9g, \"work\": %ld, \"checksum\": %.17g}\n", taken, size * instants, checksum);
  return 0;
}
