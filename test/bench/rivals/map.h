/*
 * The map of weighted reflectance: rows are films of their own n and k, columns thicknesses one step apart, so the film's phase
 * turns by the same factor from one column to the next: no sine after the first. Two wavelengths share a division, and what a
 * film carries from column to column stays in registers. R = |r01 + B|^2 / |1 + r01 B|^2 with B = r12 exp(-2 i delta).
 */
/* Four wavelengths of one film: 2 r01, |r01|^2, weight, the turn of one step, and r12 E at the thickness reached. */
typedef double four __attribute__((vector_size(32)));
#define FOUR 4
#define LOAD(name, l) {name[l], name[(l) + 1], name[(l) + 2], name[(l) + 3]}
#define FILM(l)                                                                                                    \
  {LOAD(ar, l), LOAD(ai, l), LOAD(a2, l), LOAD(w, l),  LOAD(gr, l),                                                \
   LOAD(gi, l), LOAD(g2, l), LOAD(br, l), LOAD(bi, l), LOAD(b2, l)}
struct film {
  four ar, ai, a2, w, gr, gi, g2, br, bi, b2;
};
static four *sums;

/* Weighted numerator and denominator of the reflectance, and a step on. */
inline_always void step(struct film *f, four *up, four *down) {
  four x = f->ar * f->br, y = f->ai * f->bi, next = f->br * f->gr - f->bi * f->gi;
  *up = f->w * (f->a2 + f->b2 + (x + y));
  *down = 1 + f->a2 * f->b2 + (x - y);
  f->bi = f->br * f->gi + f->bi * f->gr;
  f->br = next;
  f->b2 *= f->g2;
}

static __attribute__((noipa)) void map_row(const double *nf, const double *kf, double *to) {
  const double *ns = n, *ks = k;
  lanes no;
  EACH no[l] = 0;
  int slanted = 0;
  for (int i = 0; i < angles; i++) slanted |= angle[i] != 0;
  double share = slanted && use_s && use_p ? 0.5 : 1;
  memset(sums, 0, steps * sizeof(four));
  for (int at = 0; at < padded; at += BLOCK) {
    lanes along, q0, i0, q1, i1, q2, i2, tr, ti, er, ei, gr, gi, g2;
    EACH {
      double s = incidence[at + l] * sin(angle[angles == 1 ? 0 : at + l]);
      along[l] = s * s;
    }
    normal_index(incidence + at, no, along, q0, i0);
    normal_index(nf + at, kf + at, along, q1, i1);
    normal_index(ns + at, ks + at, along, q2, i2);
    EACH tr[l] = 4 * M_PI / wave[at + l] * q1[l];
    EACH ti[l] = 4 * M_PI / wave[at + l] * i1[l];
    phase(tr, ti, first_nm, 1, er, ei);
    phase(tr, ti, step_nm, 1, gr, gi);
    EACH g2[l] = gr[l] * gr[l] + gi[l] * gi[l];
    for (int p = !use_s && slanted; p <= (use_p && slanted); p++) {
      lanes ur, ui, vr, vi, ar, ai, a2, br, bi, b2, w;
      interface(p, incidence + at, no, q0, i0, nf + at, kf + at, q1, i1, ur, ui, vr, vi);
      EACH {
        double size = vr[l] * vr[l] + vi[l] * vi[l];
        double r = (ur[l] * vr[l] + ui[l] * vi[l]) / size, i = (ui[l] * vr[l] - ur[l] * vi[l]) / size;
        ar[l] = 2 * r;
        ai[l] = 2 * i;
        a2[l] = r * r + i * i;
        w[l] = share * weight[at + l];
      }
      interface(p, nf + at, kf + at, q1, i1, ns + at, ks + at, q2, i2, ur, ui, vr, vi);
      EACH {
        double size = vr[l] * vr[l] + vi[l] * vi[l];
        double r = (ur[l] * vr[l] + ui[l] * vi[l]) / size, i = (ui[l] * vr[l] - ur[l] * vi[l]) / size;
        br[l] = r * er[l] - i * ei[l];
        bi[l] = r * ei[l] + i * er[l];
        b2[l] = br[l] * br[l] + bi[l] * bi[l];
      }
      for (int l = 0; l < BLOCK; l += 2 * FOUR) {
        struct film one = FILM(l), two = FILM(l + FOUR);
        for (int t = 0; t < steps; t++) {
          four up1, down1, up2, down2;
          step(&one, &up1, &down1);
          step(&two, &up2, &down2);
          sums[t] += (up1 * down2 + up2 * down1) / (down1 * down2);
        }
      }
    }
  }
  for (int t = 0; t < steps; t++) to[t] = (sums[t][0] + sums[t][1]) + (sums[t][2] + sums[t][3]);
}
