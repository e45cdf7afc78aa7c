/*
 * What one interface and one layer do to a block of wavelengths, in loops the compiler turns into vector instructions (a short
 * loop is unrolled before it can be a vector: compile with BLOCK at the length of the grid, to the next multiple of 8).
 */
#ifndef BLOCK
#define BLOCK 32
#endif
#if BLOCK % 8
#error "BLOCK is a multiple of 8"
#endif
/* Least |q^2|, as in engine/optics/fresnel.ts. */
#define SMALLEST 1e-12
#define EACH for (int l = 0; l < BLOCK; l++)
#define inline_always static inline __attribute__((always_inline))

typedef double lanes[BLOCK];

/* Re q, Im q of n - ik where (n0 sin theta0)^2 is `along`; see engine/optics/fresnel.ts for the root. */
inline_always void normal_index(const double *nn, const double *kk, const double *along, double *re, double *im) {
  EACH {
    double a = nn[l] * nn[l] - kk[l] * kk[l] - along[l];
    double b = 2 * nn[l] * kk[l];
    double size = sqrt(a * a + b * b);
    double large = sqrt(0.5 * (size + fabs(a)));
    large = size < SMALLEST ? sqrt(SMALLEST) : large;
    double small = size < SMALLEST ? 0 : b / (2 * large);
    int forward = a >= 0 || size < SMALLEST;
    re[l] = forward ? large : small;
    im[l] = forward ? -small : -large;
  }
}

/* u and v of the interface from a to b: difference and sum of the admittances, for p multiplied by both q. */
inline_always void interface(int p, const double *na, const double *ka, const double *qa, const double *ia,
                             const double *nb, const double *kb, const double *qb, const double *ib, double *ur,
                             double *ui, double *vr, double *vi) {
  EACH {
    double ar = qa[l], ai = ia[l], br = qb[l], bi = ib[l];
    if (p) {
      double ea = na[l] * na[l] - ka[l] * ka[l], fa = -2 * na[l] * ka[l];
      double eb = nb[l] * nb[l] - kb[l] * kb[l], fb = -2 * nb[l] * kb[l];
      ar = ea * qb[l] - fa * ib[l];
      ai = ea * ib[l] + fa * qb[l];
      br = eb * qa[l] - fb * ia[l];
      bi = eb * ia[l] + fb * qa[l];
    }
    ur[l] = ar - br;
    ui[l] = ai - bi;
    vr[l] = ar + br;
    vi[l] = ai + bi;
  }
}

/* exp(-2 i delta) of a layer, from 4 pi q / lambda and the thickness. Sine and cosine apart, so that both can be vectors. */
inline_always void phase(const double *tr, const double *ti, double d, int loses, double *er, double *ei) {
  lanes x;
  EACH x[l] = tr[l] * d;
#ifdef __FAST_MATH__
  EACH er[l] = cos(x[l]);
  EACH ei[l] = -sin(x[l]);
#else
  EACH {
    double sine, cosine;
    sincos(x[l], &sine, &cosine);
    er[l] = cosine;
    ei[l] = -sine;
  }
#endif
  if (!loses) return;
#ifdef __FAST_MATH__
  EACH x[l] = exp(ti[l] * d);
#else
  EACH x[l] = ti[l] == 0 ? 1 : exp(ti[l] * d);
#endif
  EACH er[l] *= x[l];
  EACH ei[l] *= x[l];
}

/* Whether any of these is not zero. */
inline_always int any(const double *values) {
  int found = 0;
  EACH found |= values[l] != 0;
  return found;
}
