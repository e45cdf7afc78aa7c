/**
 * From the readings of one run to what they say together of its film and its light.
 *
 * A film read twice is one film: readings of one gauge are averaged, and only their repeatability gets smaller. The part that
 * a gauge's readings of a day share (`day_to_day`) is taken as common also where the days differ: the book knows when a late
 * reading was entered better than when it was made, and taking it as common never claims more than the readings hold. The last
 * reading does not supersede the first, because both are observations; a wrong one is corrected. Gauges differ independently.
 */
import type { Bias, FilmReading, GaugeBias, GaugeCovariance, LightReading } from "../../calibration/index.ts";
import { gaugeCovariance, lightSd } from "../advice/expectation.ts";
import type { Gauge, Line } from "../line/line.ts";
import type { Reading } from "../record/entries.ts";

/** Biases of the line's gauges, by gauge. A gauge whose reference wafer nobody read has none. */
export type GaugeBiases = ReadonlyMap<string, GaugeBias>;
/** What gauges read too high when a run was made. */
export interface BiasThen {
  biases: GaugeBiases;
  day: number;
}

const gaugeNamed = (line: Line, name: string): Gauge | null => line.gauges.get(name) ?? null;

const readsFilm = (reading: Reading): boolean =>
  reading.on === "polished" && (reading.index !== undefined || reading.thickness_nm !== undefined);

/**
 * The film as all readings on a witness say together, with the covariance of that. With `then`, what the gauges read too high
 * is taken away, and its uncertainty added; without, values are as read. Null when nothing was read.
 */
export function filmReading(line: Line, readings: readonly Reading[], then?: BiasThen): FilmReading | null {
  let first: Reading | null = null;
  let several = false;
  for (const reading of readings) {
    if (!readsFilm(reading)) continue;
    several ||= first !== null;
    first ??= reading;
  }
  if (!first) return null;
  if (!several) return corrected(single(line, first), then?.biases.get(first.gauge)?.at(then.day));
  const film = readings.filter(readsFilm);
  const gauges = [...new Set(film.map((reading) => reading.gauge))];
  const said = gauges.map((gauge) => {
    const own = film.filter((reading) => reading.gauge === gauge);
    return corrected(ofOneGauge(line, own), then?.biases.get(gauge)?.at(then.day));
  });
  return said.length === 1 ? said[0] : together(said);
}

function single(line: Line, reading: Reading): FilmReading {
  const { index = null, thickness_nm: thicknessNm = null } = reading;
  const [vn, cov, vd] = gaugeCovariance(gaugeNamed(line, reading.gauge), reading.sites ?? 1);
  return { index, thicknessNm, gauge: ownPart(index, thicknessNm, [vn, cov, vd]) };
}

/** A covariance without the rows of what was not read. */
function ownPart(index: number | null, thicknessNm: number | null, [vn, cov, vd]: GaugeCovariance): GaugeCovariance {
  return [index === null ? 0 : vn, index === null || thicknessNm === null ? 0 : cov, thicknessNm === null ? 0 : vd];
}

/** Several readings of one gauge: the repeatability averages, what they share does not. */
function ofOneGauge(line: Line, readings: readonly Reading[]): FilmReading {
  const gauge = gaugeNamed(line, readings[0].gauge);
  // Of ever more sites only what all readings share is left.
  const shared = gaugeCovariance(gauge, Number.POSITIVE_INFINITY);
  const mean = together(
    readings.map((reading) => {
      const all = single(line, reading);
      const own = all.gauge.map((v, i) => v - shared[i]) as [number, number, number];
      return { ...all, gauge: ownPart(all.index, all.thicknessNm, own) };
    }),
  );
  const { index, thicknessNm } = mean;
  const sum = mean.gauge.map((v, i) => v + shared[i]) as [number, number, number];
  return { index, thicknessNm, gauge: ownPart(index, thicknessNm, sum) };
}

/** Independent readings of one film, each weighed by what it knows (Gauss-Markov); they need not read the same properties. */
function together(readings: readonly FilmReading[]): FilmReading {
  let [a, b, c, x, y] = [0, 0, 0, 0, 0];
  for (const { index, thicknessNm, gauge } of readings) {
    const [vn, cov, vd] = gauge;
    if (index !== null && thicknessNm !== null) {
      const det = vn * vd - cov * cov;
      a += vd / det;
      b -= cov / det;
      c += vn / det;
      x += (vd * index - cov * thicknessNm) / det;
      y += (vn * thicknessNm - cov * index) / det;
    } else if (index !== null) {
      a += 1 / vn;
      x += index / vn;
    } else if (thicknessNm !== null) {
      c += 1 / vd;
      y += thicknessNm / vd;
    }
  }
  if (c === 0) return { index: x / a, thicknessNm: null, gauge: [1 / a, 0, 0] };
  if (a === 0) return { index: null, thicknessNm: y / c, gauge: [0, 0, 1 / c] };
  const det = a * c - b * b;
  return { index: (c * x - b * y) / det, thicknessNm: (a * y - b * x) / det, gauge: [c / det, -b / det, a / det] };
}

function corrected(film: FilmReading, bias: Bias | undefined): FilmReading {
  if (!bias) return film;
  const { index, thicknessNm, gauge } = film;
  const added = ownPart(index, thicknessNm, bias.covariance);
  return {
    index: index === null ? null : index - bias.index,
    thicknessNm: thicknessNm === null ? null : thicknessNm - bias.thicknessNm,
    gauge: [gauge[0] + added[0], gauge[1] + added[1], gauge[2] + added[2]],
  };
}

/** The light as all readings of it say together, one value of each kind at most: the mean, weighed by what each gauge knows. */
export function lightReadings(line: Line, readings: readonly Reading[]): LightReading[] {
  const out: LightReading[] = [];
  for (const kind of ["reflectance_minimum_nm", "weighted_reflectance_percent"] as const) {
    let weight = 0;
    let sum = 0;
    for (const reading of readings) {
      // On pyramids only the cell has the light the goal speaks of; a polished wafer is its own witness.
      if (reading.on !== "cell" && line.wafer.surface === "pyramids") continue;
      const value = reading[kind];
      if (value === undefined) continue;
      const w = 1 / lightSd(gaugeNamed(line, reading.gauge), kind) ** 2;
      weight += w;
      sum += w * value;
    }
    if (weight > 0) out.push({ kind, value: sum / weight, sd: 1 / Math.sqrt(weight) });
  }
  return out;
}
