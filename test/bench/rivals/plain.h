/*
 * The same spectrum as one writes it down from the textbook: wavelength by wavelength, Fresnel coefficients, the recursion
 * G = (r + P) / (1 + r P), the C library's sine, cosine and exponential, real and imaginary parts by hand. What a scientist's C
 * is before anybody lays it out for vector instructions.
 */
static void root(double n, double k, double along, double *re, double *im) {
  double a = n * n - k * k - along, b = -2 * n * k, size = sqrt(a * a + b * b);
  if (size < SMALLEST) { *re = sqrt(SMALLEST); *im = 0; }
  else if (a >= 0) { *re = sqrt((size + a) / 2); *im = b / (2 * *re); }
  else { *im = -sqrt((size - a) / 2); *re = -b / (2 * -*im); }
}

static __attribute__((noipa)) void plain(const double *d, double *to) {
  for (int i = 0; i < waves; i++) {
    double re[MOST_LAYERS + 2], im[MOST_LAYERS + 2], er[MOST_LAYERS], ei[MOST_LAYERS], sum = 0;
    double s = incidence[i] * sin(angle[angles == 1 ? 0 : i]), along = s * s;
    int shown = 0;
    for (int j = 0; j < layers + 2; j++) {
      double nn = j ? n[(j - 1) * padded + i] : incidence[i], kk = j ? k[(j - 1) * padded + i] : 0;
      if (along == 0) { re[j] = nn; im[j] = -kk; }
      else root(nn, kk, along, &re[j], &im[j]);
    }
    for (int j = 0; j < layers; j++) {
      double c = 4 * M_PI * d[j] / wave[i], size = im[j + 1] == 0 ? 1 : exp(c * im[j + 1]), sine, cosine;
      sincos(c * re[j + 1], &sine, &cosine);
      er[j] = size * cosine;
      ei[j] = -size * sine;
    }
    for (int p = !use_s && along != 0; p <= (use_p && along != 0); p++) {
      double gr = 0, gi = 0;
      for (int j = layers; j >= 0; j--) {
        double ar = re[j], ai = im[j], br = re[j + 1], bi = im[j + 1];
        if (p) {
          double na = j ? n[(j - 1) * padded + i] : incidence[i], ka = j ? k[(j - 1) * padded + i] : 0;
          double nb = n[j * padded + i], kb = k[j * padded + i];
          double ea = na * na - ka * ka, fa = -2 * na * ka, eb = nb * nb - kb * kb, fb = -2 * nb * kb;
          double tr = ea * br - fa * bi, ti = ea * bi + fa * br;
          br = eb * ar - fb * ai;
          bi = eb * ai + fb * ar;
          ar = tr;
          ai = ti;
        }
        double dr = ar + br, di = ai + bi, size = dr * dr + di * di, ur = ar - br, ui = ai - bi;
        double rr = (ur * dr + ui * di) / size, ri = (ui * dr - ur * di) / size;
        if (j == layers) { gr = rr; gi = ri; continue; }
        double pr = gr * er[j] - gi * ei[j], pi = gr * ei[j] + gi * er[j];
        double hr = 1 + rr * pr - ri * pi, hi = rr * pi + ri * pr;
        size = hr * hr + hi * hi;
        gr = ((rr + pr) * hr + (ri + pi) * hi) / size;
        gi = ((ri + pi) * hr - (rr + pr) * hi) / size;
      }
      sum += gr * gr + gi * gi;
      shown++;
    }
    to[i] = sum / shown;
  }
}
