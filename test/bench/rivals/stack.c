/*
 * The yardstick in C for the optics benches: reflectance of coherent stacks and the map of one film's weighted reflectance
 * over index and thickness, written for speed: real and imaginary parts spelled out, blocks of wavelengths (lanes.h),
 * spectra without divisions on the way (spectra.h), the map by a rotation (map.h). N = n - ik, time factor exp(+iwt).
 *
 * Protocol (rival.ts): standard input holds a problem, then commands, one a line. "go N" does the work N times and prints
 * the nanoseconds it took and the sum of the results; "answer" prints every result with 17 digits.
 *
 *   KIND WAVELENGTHS LAYERS STACKS ANGLES POLARISATION     KIND whole, plain or thicknesses; ANGLES 1 or WAVELENGTHS
 *   wavelength_nm.. incidence_index.. angle_rad..          POLARISATION s, p or both
 *   n.. k..                                                of every layer from the light inwards, then of the substrate
 *   thickness_nm..                                         LAYERS of them, STACKS times
 *
 *   map WAVELENGTHS ROWS STEPS ANGLES POLARISATION
 *   wavelength_nm.. incidence_index.. angle_rad..  weight..  substrate n.. k..  first_nm step_nm  film n.. k.. (ROWS times)
 */
#define _GNU_SOURCE
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include "lanes.h"

static int waves, padded, layers, stacks, rows, steps, angles, use_s, use_p;
static double *wave, *incidence, *angle, *weight, *n, *k, *thickness, *out;
static double first_nm, step_nm;

#include "spectra.h"
#include "plain.h"
#include "map.h"

static void fail(const char *why) {
  fprintf(stderr, "%s\n", why);
  exit(2);
}

static double *space(size_t count) {
  double *made = aligned_alloc(64, (count * sizeof(double) / 64 + 1) * 64);
  if (!made) fail("no memory");
  memset(made, 0, count * sizeof(double));
  return made;
}

/* Reads `count` numbers and repeats the last one up to a whole number of blocks. */
static void numbers(double *to, int count, int whole_blocks) {
  for (int i = 0; i < count; i++)
    if (scanf("%lf", to + i) != 1) fail("a number is missing");
  for (int i = count; i < whole_blocks; i++) to[i] = to[count - 1];
}

static double *column(void) {
  double *to = space(padded);
  numbers(to, waves, padded);
  return to;
}

int main(void) {
  char kind[16], light[8];
  int one, two;
  if (scanf("%15s %d %d %d %d %7s", kind, &waves, &one, &two, &angles, light) != 6) fail("no problem");
  int map = !strcmp(kind, "map"), ready = !strcmp(kind, "thicknesses"), simple = !strcmp(kind, "plain");
  if (!map && !ready && !simple && strcmp(kind, "whole")) fail("kind is whole, plain, thicknesses or map");
  use_s = strcmp(light, "p");
  use_p = strcmp(light, "s");
  padded = (waves + BLOCK - 1) / BLOCK * BLOCK;
  layers = map ? 0 : one;
  stacks = map ? one : two;
  rows = one;
  steps = two;
  if (layers > MOST_LAYERS) fail("too many layers");
  wave = column();
  incidence = column();
  angle = space(padded);
  numbers(angle, angles, padded);
  int width = map ? steps : padded;
  if (map) {
    weight = column();
    sums = (four *)space((size_t)steps * FOUR);
    for (int i = waves; i < padded; i++) weight[i] = 0;
  }
  int media = map ? 1 + rows : layers + 1;
  n = space((size_t)media * padded);
  k = space((size_t)media * padded);
  for (int j = 0; j < media; j++) {
    numbers(n + j * padded, waves, padded);
    numbers(k + j * padded, waves, padded);
    if (map && j == 0 && scanf("%lf %lf", &first_nm, &step_nm) != 2) fail("no thickness");
  }
  thickness = space((size_t)stacks * layers + 1);
  numbers(thickness, stacks * layers, 0);
  out = space((size_t)stacks * width);
  if (ready) {
    turns = space((size_t)2 * (layers + 1) * padded);
    bounces = space((size_t)4 * (layers + 1) * padded);
    lossy = calloc((size_t)(layers + 1) * (padded / BLOCK), sizeof(int));
    prepare();
  }
  char word[16];
  while (scanf("%15s", word) == 1) {
    if (!strcmp(word, "go")) {
      long times;
      if (scanf("%ld", &times) != 1) fail("go how often?");
      struct timespec from, to;
      clock_gettime(CLOCK_MONOTONIC, &from);
      for (long time = 0; time < times; time++)
        for (int s = 0; s < stacks; s++) {
          if (map) map_row(n + (s + 1) * padded, k + (s + 1) * padded, out + s * width);
          else if (simple) plain(thickness + s * layers, out + s * width);
          else if (ready) evaluate(thickness + s * layers, out + s * width);
          else whole(thickness + s * layers, out + s * width);
        }
      clock_gettime(CLOCK_MONOTONIC, &to);
      double sum = 0;
      for (int s = 0; s < stacks; s++)
        for (int i = 0; i < (map ? steps : waves); i++) sum += out[s * width + i];
      printf("%.0f %.17g\n", 1e9 * (double)(to.tv_sec - from.tv_sec) + (double)(to.tv_nsec - from.tv_nsec), sum);
    } else if (!strcmp(word, "answer")) {
      for (int s = 0; s < stacks; s++)
        for (int i = 0; i < (map ? steps : waves); i++) printf("%.17g ", out[s * width + i]);
      printf("\n");
    } else fail("commands are go N and answer");
    fflush(stdout);
  }
  return 0;
}
