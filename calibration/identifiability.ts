/**
 * What a chamber's history cannot tell: settings that never moved, settings that only ever moved together, and levels too
 * close to speak. Said in words with the run that would tell; predictions stay honest either way, because an untold
 * coefficient keeps its prior's width.
 */
import type { ChamberModel } from "./chamber-model.ts";
import type { Lever } from "./film-response.ts";

export interface Untold {
  /** Settings concerned. */
  settings: string[];
  kind: "never moved" | "moved together" | "hardly moved";
  sentence: string;
}

/** Relative spread below which a setting is said to have hardly moved: a tenth of what would change the film by a goal's width. */
const hardly = 0.004;

/** Names what the measured runs of this chamber leave open, for the tunable settings first. */
export function untold(model: ChamberModel, levers: readonly Lever[]): Untold[] {
  const runs = model.runs;
  if (runs.length === 0) return [];
  const out: Untold[] = [];
  const logs = new Map<string, number[]>();
  for (const lever of levers) {
    const values = runs.map((r) => r.settings.get(lever.setting)).filter((v): v is number => v !== undefined);
    if (values.length < runs.length) continue;
    logs.set(
      lever.setting,
      values.map((v) => (v > 0 ? Math.log(v) : v)),
    );
  }
  const spread = new Map([...logs].map(([name, values]) => [name, sd(values)]));
  const still = [...spread].filter(([, s]) => s < 1e-6).map(([name]) => name);
  if (still.length > 0)
    out.push({
      settings: still,
      kind: "never moved",
      sentence: `${list(still)} never moved in this chamber's ${runs.length} measured runs: what ${still.length > 1 ? "they do" : "it does"} is taken from sisters or from the prior.`,
    });
  const faint = [...spread].filter(([, s]) => s >= 1e-6 && s < hardly).map(([name]) => name);
  if (faint.length > 0)
    out.push({
      settings: faint,
      kind: "hardly moved",
      sentence: `${list(faint)} moved by under ${(hardly * 100).toFixed(1)} %: one run about 3 % away would tell more than ten like these.`,
    });
  const moving = [...spread].filter(([, s]) => s >= hardly).map(([name]) => name);
  const silane = levers.find((l) => l.meaning === "silane")?.setting;
  const ammonia = levers.find((l) => l.meaning === "ammonia")?.setting;
  if (silane && ammonia && moving.includes(silane) && still.includes(ammonia))
    out.push({
      settings: [silane, ammonia],
      kind: "moved together",
      sentence: `Only ${silane} moved, never ${ammonia}: gas ratio and total flow cannot be told apart. A run with ${ammonia} 3 % higher and ${silane} as it is would tell.`,
    });
  for (let i = 0; i < moving.length; i++)
    for (let j = i + 1; j < moving.length; j++) {
      const r = correlation(logs.get(moving[i]) ?? [], logs.get(moving[j]) ?? []);
      if (Math.abs(r) > 0.985 && runs.length > 3)
        out.push({
          settings: [moving[i], moving[j]],
          kind: "moved together",
          sentence: `${moving[i]} and ${moving[j]} always moved together (correlation ${r.toFixed(3)}): their effects cannot be told apart. A run that moves ${moving[j]} alone would tell.`,
        });
    }
  return out;
}

const mean = (v: readonly number[]) => v.reduce((a, b) => a + b, 0) / v.length;
const sd = (v: readonly number[]) => {
  const m = mean(v);
  return Math.sqrt(v.reduce((s, x) => s + (x - m) ** 2, 0) / Math.max(v.length - 1, 1));
};
function correlation(a: readonly number[], b: readonly number[]): number {
  const ma = mean(a);
  const mb = mean(b);
  let ab = 0;
  let aa = 0;
  let bb = 0;
  for (let i = 0; i < a.length; i++) {
    ab += (a[i] - ma) * (b[i] - mb);
    aa += (a[i] - ma) ** 2;
    bb += (b[i] - mb) ** 2;
  }
  return ab / Math.sqrt(aa * bb);
}
const list = (names: readonly string[]) =>
  names.length < 2 ? names.join("") : `${names.slice(0, -1).join(", ")} and ${names.at(-1)}`;
