/** What a chamber's model has learned, in trade units: what one per cent more of each setting does, offsets beside sisters, drift, track record. */
import type { ChamberModel, Coverage, Settings } from "../../calibration/index.ts";
import type { Workspace } from "./workspace.ts";

const signed = (v: number, digits: number) => `${v < 0 ? "-" : "+"}${Math.abs(v).toFixed(digits)}`;

/** "+1 % silane: +0.0022 index, +0.62 nm (95 %: 0.0015..0.0029, 0.55..0.69)" */
export function slopeSentences(ws: Workspace, model: ChamberModel, at: Settings): string[] {
  const d = Math.exp(model.quick(at).lnThickness);
  const out: string[] = [];
  for (const setting of ws.line.settings.values()) {
    const value = at.get(setting.name);
    if (value === undefined) continue;
    const linear = setting.dimension === "temperature" || value === 0;
    const by = linear ? 1 : 0.01 * value;
    const e = model.effect(at, new Map(at).set(setting.name, value + by));
    const what = linear ? `+1 ${setting.unit} ${setting.name}` : `+1 % ${setting.name}`;
    const nm = d * e.lnThickness.mean;
    const nmHalf = 1.96 * d * e.lnThickness.sd;
    const half = 1.96 * e.index.sd;
    const touched = Math.abs(e.index.mean) > 1e-9 || half > 1e-9;
    const index = touched
      ? `index ${signed(e.index.mean, 4)} (95 % ${signed(e.index.mean - half, 4)} to ${signed(e.index.mean + half, 4)}), `
      : "";
    out.push(
      `${what}: ${index}thickness ${signed(nm, 2)} nm (${signed(nm - nmHalf, 2)} to ${signed(nm + nmHalf, 2)}).`,
    );
  }
  return out;
}

export function learned(ws: Workspace, model: ChamberModel, at: Settings, coverage: Coverage | null): string[] {
  const out = slopeSentences(ws, model, at);
  const d = Math.exp(model.quick(at).lnThickness);
  const terms = model.coefficients();
  const drift = (output: "index" | "rate") => terms.find((c) => c.term.name === "drift" && c.term.output === output);
  const n = drift("index");
  const r = drift("rate");
  if (n && r)
    out.push(
      `Drift over 10 depositions: index ${signed(10 * n.mean, 4)} (sd ${(10 * n.sd).toFixed(4)}), thickness ${signed(10 * r.mean * d, 2)} nm (sd ${(10 * r.sd * d).toFixed(2)}).`,
    );
  const here = model.quick(at);
  for (const { chamber } of model.context.sisters) {
    const other = ws.model?.chamber(chamber).quick(at);
    if (!other) continue;
    out.push(
      `At these settings ${chamber} would lay index ${other.index.toFixed(3)}, ${Math.exp(other.lnThickness).toFixed(1)} nm: ${model.chamber} differs by ${signed(here.index - other.index, 3)} and ${signed(d - Math.exp(other.lnThickness), 1)} nm.`,
    );
  }
  const facet = ws.light.facet;
  if (ws.line.wafer.surface === "pyramids")
    out.push(
      facet.runs > 0
        ? `Facet factor ${facet.mean.toFixed(3)} sd ${facet.sd.toFixed(3)}, pinned by ${facet.runs} reflectance minima on textured cells.`
        : `Facet factor ${facet.mean.toFixed(2)} sd ${facet.sd.toFixed(2)} as declared; no reflectance minimum has pinned it.`,
    );
  if (coverage)
    out.push(
      `Track record: ${Math.round(100 * coverage.inside)} % of ${coverage.readings} readings fell inside the 95 % interval given before them; mean squared surprise ${coverage.meanSquare.toFixed(2)} (1 when the model holds).`,
    );
  return out;
}
