/**
 * Published Sellmeier coefficients: n^2 = 1 + sum b l^2 / (l^2 - c^2), l in micrometres, each term [b, c in micrometres].
 * Neither source gives k. Ranges in nm are those of the sources, cut at 2000 nm.
 */

/** Fused silica at 20 degC. Source: I. H. Malitson, J. Opt. Soc. Am. 55, 1205-1208 (1965). */
export const silicaMalitson1965 = {
  name: "silica",
  source: "I. H. Malitson, J. Opt. Soc. Am. 55, 1205-1208 (1965)",
  rangeNm: [210, 2000] as const,
  terms: [
    [0.6961663, 0.0684043],
    [0.4079426, 0.1162414],
    [0.8974794, 9.896161],
  ] as const,
};

/**
 * Silicon nitride, n only. Source: H. R. Philipp, J. Electrochem. Soc. 120, 295-300 (1973), in the form of
 * T. Baak, Appl. Opt. 21, 1069-1072 (1982).
 */
export const nitridePhilipp1973 = {
  name: "silicon nitride (Philipp)",
  source: "H. R. Philipp, J. Electrochem. Soc. 120, 295-300 (1973); formula of T. Baak, Appl. Opt. 21, 1069-1072 (1982)",
  rangeNm: [207, 1240] as const,
  terms: [[2.8939, 0.13967]] as const,
};
