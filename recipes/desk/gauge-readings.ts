/**
 * The gauges as their reference wafers show them: from the book's reference readings to a bias over time, and that in words.
 */
import { type GaugeBias, gaugeBias } from "../../calibration/index.ts";
import { gaugeCovariance } from "../advice/expectation.ts";
import type { Gauge, Line } from "../line/line.ts";
import { formatWhen } from "../line/zoned-time.ts";
import type { Ledger } from "../record/ledger.ts";
import type { BiasThen, GaugeBiases } from "./film-readings.ts";

const dayMs = 86_400_000;

/** Days since 1970 in the line's own zone; what is read on one of them shares a gauge's day. */
export function dayOf(line: Line, atMs: number): number {
  return Date.parse(`${formatWhen(atMs, line.timeZone).replace(" ", "T")}Z`) / dayMs;
}

/** The bias of every gauge whose reference wafer was read. */
export function gaugeBiases(line: Line, ledger: Pick<Ledger, "gaugeReadings">): GaugeBiases {
  const out = new Map<string, GaugeBias>();
  for (const gauge of line.gauges.values()) {
    const readings = ledger.gaugeReadings
      .filter((reading) => reading.gauge === gauge.name)
      .map(({ atMs, index, thicknessNm }) => ({ day: dayOf(line, atMs), index, thicknessNm }));
    if (readings.length === 0) continue;
    const shared = gaugeCovariance(gauge, Number.POSITIVE_INFINITY);
    const all = gaugeCovariance(gauge, 1);
    const bias = gaugeBias(readings, {
      repeatability: [all[0] - shared[0], all[1] - shared[1], all[2] - shared[2]],
      dayToDay: shared,
      certified: { index: gauge.reference?.index ?? null, thicknessNm: gauge.reference?.thicknessNm ?? null },
    });
    if (bias) out.set(gauge.name, bias);
  }
  return out;
}

/** The biases with the day of a run; undefined where no gauge has one. A gauge wanders slowly, so UTC days will do. */
export function biasThen(biases: GaugeBiases, atMs: number): BiasThen | undefined {
  return biases.size === 0 ? undefined : { biases, day: atMs / dayMs };
}

/** When the last thing happened to a chamber or a gauge, ms since 1970; 0 for an empty book. */
export function latestMs({ chambers, gaugeReadings }: Ledger): number {
  const lives = [...chambers.values()].map(({ timeline }) => timeline.at(-1)?.atMs ?? 0);
  return Math.max(0, gaugeReadings.at(-1)?.atMs ?? 0, ...lives);
}

const signed = (value: number, digits: number) => `${value < 0 ? "-" : "+"}${Math.abs(value).toFixed(digits)}`;

/** "+0.004 (sd 0.002) in index and -0.2 nm (sd 0.3) in thickness" of a gauge at a time. */
export function biasWords(bias: GaugeBias, atMs: number): string {
  const { index, thicknessNm, covariance } = bias.at(atMs / dayMs);
  const parts: string[] = [];
  if (bias.readings.index > 0) parts.push(`${signed(index, 4)} (sd ${Math.sqrt(covariance[0]).toFixed(4)}) in index`);
  if (bias.readings.thicknessNm > 0)
    parts.push(`${signed(thicknessNm, 2)} nm (sd ${Math.sqrt(covariance[2]).toFixed(2)}) in thickness`);
  return parts.join(" and ");
}

/** A sentence a gauge whose reference was read: what it reads too high now, and that runs are corrected for it. */
export function gaugeSentences(line: Line, ledger: Ledger, biases: GaugeBiases, nowMs: number): string[] {
  return [...biases].map(([name, bias]) => {
    const count = ledger.gaugeReadings.filter((reading) => reading.gauge === name).length;
    const against = line.gauges.get(name)?.reference ? "certified values" : "first readings";
    const aside = bias.doubted.length === 0 ? "" : `, ${bias.doubted.length} left aside`;
    const ago = Math.max(Math.floor(dayOf(line, nowMs)) - bias.lastDay, 0);
    const last = ago === 0 ? "today" : ago === 1 ? "yesterday" : `${ago} days ago`;
    return `Gauge ${name} now reads ${biasWords(bias, nowMs)} beside the ${against} of its reference wafer (${count} reading${count === 1 ? "" : "s"}${aside}, the last ${last}); runs are corrected for it.`;
  });
}

/** What cannot be told of a gauge whose reference nobody read. */
export function gaugesUntold(line: Line, biases: GaugeBiases): string[] {
  const film = (gauge: Gauge) => gauge.index !== undefined || gauge.thicknessNm !== undefined;
  const without = [...line.gauges.values()].filter((g) => g.on === "polished" && film(g) && !biases.has(g.name));
  if (without.length === 0) return [];
  const names = without.map((gauge) => gauge.name).join(", ");
  return [
    `Whether ${names} read${without.length === 1 ? "s" : ""} too high or drifts: no reference wafer was recorded (coatwright record gauge), so a bias of the gauge counts as the chambers' own offset.`,
  ];
}
