/*
 * Reflectance spectra of stacks of any number of layers. Nothing is divided before the last step:
 *
 *   G_j = (u Y + v X) / (v Y + u X),   P_j = X / Y,   u = y_j - y_(j+1),   v = y_j + y_(j+1),   y the admittance,
 *
 * so a stack carries X and Y upwards and R is |X|^2 / |Y|^2 at the top.
 */
/* |Y|^2 grows by up to (4 N^2 q)^2 a layer, so that many layers stay far from overflow. */
#define MOST_LAYERS 40

/* For "thicknesses": 4 pi q / lambda a layer (re, im), then the interfaces' coefficients (re, im) of s and of p. */
static double *turns, *bounces;
static int *lossy;

/* Everything from n, k, thickness and wavelength, a block of wavelengths at a time. */
static __attribute__((noipa)) void whole(const double *d, double *to) {
  for (int at = 0; at < padded; at += BLOCK) {
    double re[MOST_LAYERS + 2][BLOCK], im[MOST_LAYERS + 2][BLOCK], er[MOST_LAYERS][BLOCK], ei[MOST_LAYERS][BLOCK];
    lanes along, no, total;
    int slanted = 0;
    EACH {
      double s = incidence[at + l] * sin(angle[angles == 1 ? 0 : at + l]);
      along[l] = s * s;
      slanted |= s != 0;
      no[l] = 0;
      total[l] = 0;
    }
    for (int j = 0; j < layers + 2; j++) {
      const double *nn = j ? n + (j - 1) * padded + at : incidence + at;
      const double *kk = j ? k + (j - 1) * padded + at : no;
      if (slanted) normal_index(nn, kk, along, re[j], im[j]);
      else EACH { re[j][l] = nn[l]; im[j][l] = -kk[l]; }
    }
    for (int j = 0; j < layers; j++) {
      lanes tr, ti;
      EACH {
        double c = 4 * M_PI / wave[at + l];
        tr[l] = c * re[j + 1][l];
        ti[l] = c * im[j + 1][l];
      }
      phase(tr, ti, d[j], any(im[j + 1]), er[j], ei[j]);
    }
    for (int p = !use_s && slanted; p <= (use_p && slanted); p++) {
      lanes xr, xi, yr, yi, ur, ui, vr, vi;
      for (int j = layers; j >= 0; j--) {
        const double *na = j ? n + (j - 1) * padded + at : incidence + at, *nb = n + j * padded + at;
        const double *ka = j ? k + (j - 1) * padded + at : no, *kb = k + j * padded + at;
        if (p) interface(1, na, ka, re[j], im[j], nb, kb, re[j + 1], im[j + 1], ur, ui, vr, vi);
        else interface(0, na, ka, re[j], im[j], nb, kb, re[j + 1], im[j + 1], ur, ui, vr, vi);
        if (j == layers) {
          EACH { xr[l] = ur[l]; xi[l] = ui[l]; yr[l] = vr[l]; yi[l] = vi[l]; }
        } else {
          EACH {
            double br = xr[l] * er[j][l] - xi[l] * ei[j][l], bi = xr[l] * ei[j][l] + xi[l] * er[j][l];
            double cr = yr[l], ci = yi[l];
            xr[l] = ur[l] * cr - ui[l] * ci + vr[l] * br - vi[l] * bi;
            xi[l] = ur[l] * ci + ui[l] * cr + vr[l] * bi + vi[l] * br;
            yr[l] = vr[l] * cr - vi[l] * ci + ur[l] * br - ui[l] * bi;
            yi[l] = vr[l] * ci + vi[l] * cr + ur[l] * bi + ui[l] * br;
          }
        }
      }
      EACH total[l] += (xr[l] * xr[l] + xi[l] * xi[l]) / (yr[l] * yr[l] + yi[l] * yi[l]);
    }
    double share = slanted && use_s && use_p ? 0.5 : 1;
    EACH to[at + l] = share * total[l];
  }
}

/* What does not depend on the thickness, once: turns of every layer, u / v of every interface and polarisation. */
static void prepare(void) {
  lanes no;
  EACH no[l] = 0;
  for (int at = 0; at < padded; at += BLOCK) {
    double re[MOST_LAYERS + 2][BLOCK], im[MOST_LAYERS + 2][BLOCK];
    lanes along, ur, ui, vr, vi;
    EACH {
      double s = incidence[at + l] * sin(angle[angles == 1 ? 0 : at + l]);
      along[l] = s * s;
    }
    for (int j = 0; j < layers + 2; j++)
      normal_index(j ? n + (j - 1) * padded + at : incidence + at, j ? k + (j - 1) * padded + at : no, along, re[j], im[j]);
    for (int j = 0; j < layers; j++) {
      EACH turns[2 * j * padded + at + l] = 4 * M_PI / wave[at + l] * re[j + 1][l];
      EACH turns[(2 * j + 1) * padded + at + l] = 4 * M_PI / wave[at + l] * im[j + 1][l];
      lossy[j * (padded / BLOCK) + at / BLOCK] = any(im[j + 1]);
    }
    for (int p = 0; p < 2; p++)
      for (int j = 0; j <= layers; j++) {
        double *r = bounces + 2 * (p * (layers + 1) + j) * padded + at;
        interface(p, j ? n + (j - 1) * padded + at : incidence + at, j ? k + (j - 1) * padded + at : no, re[j], im[j],
                  n + j * padded + at, k + j * padded + at, re[j + 1], im[j + 1], ur, ui, vr, vi);
        EACH {
          double size = vr[l] * vr[l] + vi[l] * vi[l];
          r[l] = (ur[l] * vr[l] + ui[l] * vi[l]) / size;
          r[padded + l] = (ui[l] * vr[l] - ur[l] * vi[l]) / size;
        }
      }
  }
}

/* A spectrum of new thicknesses on what `prepare` kept. */
static __attribute__((noipa)) void evaluate(const double *d, double *to) {
  int slanted = 0;
  for (int i = 0; i < angles; i++) slanted |= angle[i] != 0;
  double share = slanted && use_s && use_p ? 0.5 : 1;
  for (int at = 0; at < padded; at += BLOCK) {
    double er[MOST_LAYERS][BLOCK], ei[MOST_LAYERS][BLOCK];
    lanes total;
    EACH total[l] = 0;
    for (int j = 0; j < layers; j++)
      phase(turns + 2 * j * padded + at, turns + (2 * j + 1) * padded + at, d[j],
            lossy[j * (padded / BLOCK) + at / BLOCK], er[j], ei[j]);
    for (int p = !use_s && slanted; p <= (use_p && slanted); p++) {
      const double *r = bounces + 2 * (p * (layers + 1) + layers) * padded + at, *i = r + padded;
      lanes xr, xi, yr, yi;
      EACH { xr[l] = r[l]; xi[l] = i[l]; yr[l] = 1; yi[l] = 0; }
      for (int j = layers - 1; j >= 0; j--) {
        r -= 2 * padded;
        i -= 2 * padded;
        EACH {
          double br = xr[l] * er[j][l] - xi[l] * ei[j][l], bi = xr[l] * ei[j][l] + xi[l] * er[j][l];
          double cr = yr[l], ci = yi[l];
          xr[l] = r[l] * cr - i[l] * ci + br;
          xi[l] = r[l] * ci + i[l] * cr + bi;
          yr[l] = cr + r[l] * br - i[l] * bi;
          yi[l] = ci + r[l] * bi + i[l] * br;
        }
      }
      EACH total[l] += (xr[l] * xr[l] + xi[l] * xi[l]) / (yr[l] * yr[l] + yi[l] * yi[l]);
    }
    EACH to[at + l] = share * total[l];
  }
}
