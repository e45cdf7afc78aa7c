/**
 * Amorphous silicon film of 60 nm, rows of 190-1771 nm.
 * Rows are [wavelength nm, n, k]; N = n - ik, k >= 0 absorbs; digits as published.
 * Source: D. T. Pierce and W. E. Spicer, Phys. Rev. B 5, 3017-3029 (1972), numbers as in E. D. Palik, Handbook of Optical Constants of Solids (1985)
 * Obtained from the public-domain (CC0) refractive-index database of M. N. Polyanskiy, 2026-06-14.
 */
import type { MaterialData } from "../table.ts";

export const amorphousSiliconPierce1972: MaterialData = {
  name: "amorphous silicon",
  source:
    "D. T. Pierce and W. E. Spicer, Phys. Rev. B 5, 3017-3029 (1972), numbers as in E. D. Palik, Handbook of Optical Constants of Solids (1985)",
  rows: [
    [190.7, 0.951, 2.07], [206.6, 1.11, 2.28], [225.4, 1.35, 2.51], [248, 1.69, 2.76], [258.3, 1.86, 2.85],
    [269.5, 2.07, 2.93], [281.8, 2.3, 2.99], [295.2, 2.56, 3.04], [310, 2.87, 3.06], [326.3, 3.21, 3],
    [344.4, 3.55, 2.88], [354.3, 3.73, 2.79], [364.7, 3.9, 2.66], [387.5, 4.17, 2.38], [413.3, 4.38, 2.02],
    [442.8, 4.47, 1.64], [476.9, 4.49, 1.28], [496, 4.47, 1.12], [516.6, 4.46, 0.969], [563.6, 4.36, 0.69],
    [619.9, 4.23, 0.461], [652.6, 4.17, 0.363], [688.8, 4.09, 0.271], [729.3, 4.01, 0.199], [774.9, 3.93, 0.136],
    [826.6, 3.86, 0.0812], [885.6, 3.77, 0.0401], [953.8, 3.68, 0], [1033, 3.61, 0], [1127, 3.57, 0],
    [1240, 3.54, 0], [1378, 3.5, 0], [1550, 3.48, 0], [1771, 3.45, 0],
  ],
};
