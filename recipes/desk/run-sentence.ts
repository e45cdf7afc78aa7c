/** The one sentence after a run is recorded: "84.1 nm, 1.2 below expected, within noise". */
import { indexBounds, noBias, type Settings, thicknessBounds } from "../../calibration/index.ts";
import { Refusal } from "../../engine/index.ts";
import { gaugeCovariance, gaugeFor } from "../advice/expectation.ts";
import type { Chamber } from "../line/line.ts";
import type { Reading } from "../record/entries.ts";
import { biasThen, latestMs } from "./gauge-readings.ts";
import type { Workspace } from "./workspace.ts";

/** Compares the readings with what was expected of these settings before they were known. */
export function runSentence(ws: Workspace, chamber: Chamber, settings: Settings, readings: readonly Reading[]): string {
  const film = readings.find((r) => r.on === "polished" && (r.index !== undefined || r.thickness_nm !== undefined));
  if (!film)
    return readings.length > 0
      ? "Light readings kept; no film was measured on a witness."
      : "Recorded without a reading: it ages the chamber.";
  const said: string[] = [];
  if (film.index !== undefined) said.push(`index ${film.index.toFixed(3)}`);
  if (film.thickness_nm !== undefined) said.push(`${film.thickness_nm.toFixed(1)} nm`);
  const expected = expectedOf(ws, chamber, settings, film);
  if (!expected) return `${said.join(", ")}; nothing was expected yet.`;
  const words: string[] = [];
  let within = true;
  for (const [value, bounds, unit, digits] of [
    [film.index, expected.index, "index", 3],
    [film.thickness_nm, expected.thickness, "nm", 1],
  ] as const) {
    if (value === undefined) continue;
    const miss = value - bounds.mean;
    if (value < bounds.low || value > bounds.high) within = false;
    const text = unit === "nm" ? `${value.toFixed(digits)} nm` : `index ${value.toFixed(digits)}`;
    words.push(`${text}, ${Math.abs(miss).toFixed(digits)} ${miss < 0 ? "below" : "above"} expected`);
  }
  return `${words.join("; ")}: ${within ? "within noise" : "outside the 95 % interval, a surprise"}.`;
}

function expectedOf(ws: Workspace, chamber: Chamber, settings: Settings, film: Reading) {
  const model = ws.model;
  if (!model) return null;
  const one = model.chamber(chamber.name);
  if (one.ownReadings === 0 && one.context.sisters.length === 0) return null;
  try {
    const gauge = ws.line.gauges.get(film.gauge) ?? gaugeFor(ws.line, "polished", "film");
    // As of the last thing that happened, as proposals foresee it: a person compares the two.
    const then = biasThen(ws.gaugeBiases, latestMs(ws.ledger));
    const bias = then?.biases.get(film.gauge)?.at(then.day);
    const law = one.measuredLaw(settings, gaugeCovariance(gauge, film.sites ?? 1), bias ?? noBias);
    return { index: indexBounds(law), thickness: thicknessBounds(law) };
  } catch (error) {
    if (error instanceof Refusal) return null; // settings the model cannot use: the run itself is still worth keeping
    throw error;
  }
}
