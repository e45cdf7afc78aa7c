/** `record gauge`: a reading of a gauge's reference wafer, which shows what the gauge reads too high. */
import { refuse } from "../../engine/index.ts";
import { biasWords, gaugeBiases } from "./gauge-readings.ts";
import { type Given, gaugeNamed, measured } from "./readings-given.ts";
import { one, type Recorded } from "./recording.ts";
import type { Workspace } from "./workspace.ts";
import { type Stamp, write } from "./writing.ts";

export interface GaugeGiven {
  gauge: string;
  /** Is it a reading of the reference wafer? Nothing else is kept of a gauge. */
  reference: boolean;
  index?: Given;
  thickness?: Given;
}

/**
 * Records a reading of the reference wafer. Refuses `unknown-gauge`, `missing-argument` without `reference`, `nothing-read`,
 * `gauge-reads-nothing` for what the gauge does not read, and impossible values.
 */
export async function recordGauge(
  ws: Workspace,
  given: GaugeGiven,
  how: Stamp & { dryRun?: boolean },
): Promise<Recorded> {
  const gauge = gaugeNamed(ws, given.gauge);
  if (!given.reference)
    refuse("missing-argument", "what is kept of a gauge is a reading of its reference wafer", {
      hint: `say so: coatwright record gauge --gauge ${gauge.name} --reference --index 2.041 --thickness 84.9nm`,
    });
  if (gauge.index === undefined && gauge.thicknessNm === undefined)
    refuse("gauge-reads-nothing", `${gauge.name} reads no film, so a reference film tells nothing of it`);
  const index = measured("index", given.index, "number", "");
  const thickness = measured("thickness", given.thickness, "length", "nm");
  if (index === undefined && thickness === undefined)
    refuse("nothing-read", "nothing that was read is given", { hint: "--index 2.041 --thickness 84.9nm" });
  for (const [what, value, sd] of [
    ["index", index, gauge.index],
    ["thickness", thickness, gauge.thicknessNm],
  ] as const)
    if (value !== undefined && sd === undefined)
      refuse("gauge-reads-nothing", `${gauge.name} does not read ${what}`, {
        hint: `line.yaml declares what it reads; give its repeatability there as ${what}`,
      });
  const data = {
    gauge: gauge.name,
    reference: true as const,
    ...(index === undefined ? {} : { index }),
    ...(thickness === undefined ? {} : { thickness_nm: thickness }),
  };
  const written = await write(ws, () => [{ kind: "gauge", at: how.at, by: how.by, data }], how);
  return one(ws, written, sentenceOf(ws, gauge.name, written.receipts.at(-1)?.seq ?? null));
}

/** What the gauge is taken to read too high with this reading heard; nothing of it on a dry run. */
function sentenceOf(ws: Workspace, gauge: string, entry: number | null): string {
  if (entry === null) return "A reading of the reference wafer.";
  const own = ws.ledger.gaugeReadings.filter((reading) => reading.gauge === gauge);
  const bias = ws.gaugeBiases.get(gauge);
  if (!bias || bias.doubted.includes(own.findIndex(({ seq }) => seq === entry)))
    return `This is far from the other readings of ${gauge}'s reference wafer: it is left aside until another agrees with it.`;
  const now = Math.max(ws.ports.now(), own[own.length - 1].atMs);
  if (own.length === 1 && !ws.line.gauges.get(gauge)?.reference)
    return `The first reading of ${gauge}'s reference wafer: from here its drift is followed.`;
  const without = gaugeBiases(ws.line, { gaugeReadings: own.filter(({ seq }) => seq !== entry) }).get(gauge);
  const before = without ? `; before it, ${biasWords(without, now)}` : "";
  return `${gauge} now reads ${biasWords(bias, now)} beside its reference wafer${before}.`;
}
