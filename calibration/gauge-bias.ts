/**
 * What a gauge reads too high, over time, from its readings of a reference wafer alone: a bias of (index, thickness nm)
 * shared by all chambers it measures, so that a drifting gauge is not taken for drifting chambers.
 *
 *   reading of a day = r + b(day) + e,   b wandering slowly,   e: repeatability over the readings of that day, and the day's own part
 *
 * b moves at a pace that is itself remembered for some months and then forgotten (reference-walk.ts), so that a lamp that ages
 * steadily is followed without lag and not extrapolated for ever. Filtered forwards and smoothed backwards (Rauch, Tung and
 * Striebel 1965, from memory). With a certified value r is known to its uncertainty and b starts unknown; without one r is unknown and b starts at zero, so that
 * the first readings are the reference and the bias is what has happened since. How fast the gauge wanders is not known: the
 * filter runs at three speeds, weighed by how well each foresaw the readings.
 */
import { refuse, weightsFromLogs } from "../engine/index.ts";
import { gaugeDrift } from "./priors.ts";
import { type Day, forwards, type ReferenceGauge } from "./reference-filter.ts";
import { type Bias, type Pace, smoothed } from "./reference-walk.ts";

export type { ReferenceGauge } from "./reference-filter.ts";
export type { Bias } from "./reference-walk.ts";

/** One reading of the reference wafer. `day` counts days from any origin; its whole part is the day the readings share. */
export interface ReferenceReading {
  day: number;
  index: number | null;
  thicknessNm: number | null;
}

export interface GaugeBias {
  /** Readings used, by the property read. */
  readings: { index: number; thicknessNm: number };
  /** Positions (in the list given) of readings left aside: another wafer, a slip, or a jump that nothing has confirmed yet. */
  doubted: readonly number[];
  lastDay: number;
  /** Bias at a day; zero, and certainly so, in a property that was never read. */
  at(day: number): Bias;
}

/** No bias at all. */
export const noBias: Bias = { index: 0, thicknessNm: 0, covariance: [0, 0, 0] };

/**
 * The bias of one gauge over time. `readings` in any order. Null when there is none that can be used. Refuses `not-a-number`
 * for a day or value that is not finite.
 */
export function gaugeBias(readings: readonly ReferenceReading[], gauge: ReferenceGauge): GaugeBias | null {
  for (const { day, index, thicknessNm } of readings)
    for (const value of [day, index, thicknessNm])
      if (value !== null && !Number.isFinite(value)) refuse("not-a-number", `a reference reading holds ${value}`);
  const far = farOff(readings, gauge);
  const days = daysOf(readings, far, gauge);
  if (days.length === 0) return null;
  const used: [boolean, boolean] = [days.some((d) => d.seen[0]), days.some((d) => d.seen[1])];
  const lanes = gaugeDrift.paceTimes.map((times) => {
    const z = Math.log(times) / gaugeDrift.logSdOfPace;
    return { ...lane(days, gauge, times), logPrior: -0.5 * z * z };
  });
  const weights = weightsFromLogs(lanes.map((one) => one.logPrior + one.logDensity));
  const likeliest = lanes[weights.indexOf(Math.max(...weights))];
  const doubted = [...far, ...likeliest.doubted.flatMap((i) => days[i].members)].sort((a, b) => a - b);
  const count = (p: 0 | 1) =>
    readings.filter((r, i) => (p === 0 ? r.index : r.thicknessNm) !== null && !doubted.includes(i)).length;
  const known = new Map<number, Bias>();
  return {
    readings: { index: count(0), thicknessNm: count(1) },
    doubted,
    lastDay: days[days.length - 1].day,
    at(day) {
      const whole = Math.floor(day);
      let bias = known.get(whole);
      if (!bias) {
        bias = mixed(
          lanes.map((one) => one.at(whole)),
          weights,
          used,
        );
        known.set(whole, bias);
      }
      return bias;
    },
  };
}

/** Readings so far from the certified value, or from the middle of all, that they are of something else. */
function farOff(readings: readonly ReferenceReading[], { certified }: ReferenceGauge): number[] {
  const out = new Set<number>();
  for (const [p, key] of (["index", "thicknessNm"] as const).entries()) {
    const values = readings.flatMap((r) => (r[key] === null ? [] : [r[key]])).sort((a, b) => a - b);
    const centre = certified[key]?.value ?? values[Math.floor((values.length - 1) / 2)];
    readings.forEach((r, i) => {
      if (r[key] !== null && Math.abs(r[key] - centre) > gaugeDrift.farOff[p]) out.add(i);
    });
  }
  return [...out];
}

function daysOf(readings: readonly ReferenceReading[], far: readonly number[], gauge: ReferenceGauge): Day[] {
  const groups = new Map<number, number[]>();
  readings.forEach(({ day, index, thicknessNm }, i) => {
    if (far.includes(i) || (index === null && thicknessNm === null)) return;
    const whole = Math.floor(day);
    groups.set(whole, [...(groups.get(whole) ?? []), i]);
  });
  return [...groups]
    .sort(([a], [b]) => a - b)
    .map(([day, members]) => {
      const of = (key: "index" | "thicknessNm") => members.flatMap((i) => readings[i][key] ?? []);
      const [index, thickness] = [of("index"), of("thicknessNm")];
      const both = members.filter((i) => readings[i].index !== null && readings[i].thicknessNm !== null).length;
      const mean = (list: number[]) => (list.length === 0 ? 0 : list.reduce((a, b) => a + b, 0) / list.length);
      const [vn, cov, vd] = gauge.repeatability;
      const [dn, dcov, dd] = gauge.dayToDay;
      // cov of two means: the readings that have both, over both counts
      const shared = both === 0 ? 0 : (cov * both) / (index.length * thickness.length);
      return {
        day,
        members,
        value: [mean(index), mean(thickness)],
        seen: [index.length > 0, thickness.length > 0],
        noise: [vn / Math.max(index.length, 1) + dn, shared + dcov, vd / Math.max(thickness.length, 1) + dd],
      };
    });
}

/** One speed of wandering: which days are believed, the density of all readings, and the smoothed bias. */
function lane(days: readonly Day[], gauge: ReferenceGauge, times: number) {
  const pace: Pace = [gaugeDrift.pacePerDay[0] * times, gaugeDrift.pacePerDay[1] * times];
  const jumps = new Set<number>();
  // Each round accepts one more jump, and so ends.
  for (;;) {
    const pass = forwards(days, gauge, pace, jumps);
    if (pass.confirmed !== null) jumps.add(pass.confirmed);
    else return { ...pass, at: smoothed(pass.steps, pace) };
  }
}

/** Moments of the mixture over speeds; a property never read has no bias anybody could know of. */
function mixed(parts: readonly Bias[], weights: Float64Array, used: readonly [boolean, boolean]): Bias {
  let [index, thicknessNm] = [0, 0];
  parts.forEach((part, i) => {
    index += weights[i] * part.index;
    thicknessNm += weights[i] * part.thicknessNm;
  });
  const sum: [number, number, number] = [0, 0, 0];
  parts.forEach(({ index: n, thicknessNm: d, covariance: [vn, cov, vd] }, i) => {
    sum[0] += weights[i] * (vn + (n - index) ** 2);
    sum[1] += weights[i] * (cov + (n - index) * (d - thicknessNm));
    sum[2] += weights[i] * (vd + (d - thicknessNm) ** 2);
  });
  const [a, b] = used.map(Number);
  return { index: a * index, thicknessNm: b * thicknessNm, covariance: [a * sum[0], a * b * sum[1], b * sum[2]] };
}
