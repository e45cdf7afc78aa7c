/** What the sealed predictions came to, in figures and a sentence. */
import type { Fate, SealCounted } from "./shadowing.ts";

export interface SealCount {
  fates: Record<Fate, number>;
  inside: { index: { inside: number; of: number }; thicknessNm: { inside: number; of: number } };
  /** Mean absolute misses over the counted runs on which both spoke; null without any. */
  misses: Record<"index" | "thicknessNm", { ours: number; rival: number; runs: number } | null>;
  says: string;
}

export function sealCount(seals: readonly SealCounted[]): SealCount {
  const fates: Record<Fate, number> = {
    counted: 0,
    waiting: 0,
    other_settings: 0,
    superseded: 0,
    missing: 0,
    altered: 0,
  };
  for (const { fate } of seals) fates[fate]++;
  const of = (key: "index" | "thicknessNm") => seals.flatMap((s) => s[key] ?? []);
  const inside = (key: "index" | "thicknessNm") => ({
    inside: of(key).filter((h) => h.inside).length,
    of: of(key).length,
  });
  const misses = (key: "index" | "thicknessNm") => {
    const both = of(key).filter((h) => h.rivalMiss !== null);
    const mean = (value: (h: (typeof both)[number]) => number) =>
      both.reduce((sum, h) => sum + value(h), 0) / both.length;
    return both.length === 0
      ? null
      : { ours: mean((h) => Math.abs(h.miss)), rival: mean((h) => Math.abs(h.rivalMiss ?? 0)), runs: both.length };
  };
  const count: Omit<SealCount, "says"> = {
    fates,
    inside: { index: inside("index"), thicknessNm: inside("thicknessNm") },
    misses: { index: misses("index"), thicknessNm: misses("thicknessNm") },
  };
  return { ...count, says: sentence(count, seals.length) };
}

function sentence({ fates, inside }: Omit<SealCount, "says">, all: number): string {
  const rest = (
    [
      ["waiting", "waiting for a run"],
      ["other_settings", "whose run had other settings"],
      ["superseded", "replaced by a later seal for the same run"],
      ["missing", "whose document is gone"],
      ["altered", "whose document is not the one that was sealed"],
    ] as const
  ).flatMap(([fate, words]) => (fates[fate] > 0 ? [`${fates[fate]} ${words}`] : []));
  const counted =
    fates.counted === 0
      ? "none can be counted yet"
      : `${fates.counted} counted: ${inside.index.inside} of ${inside.index.of} index readings and ${inside.thicknessNm.inside} of ${inside.thicknessNm.of} thickness readings fell inside the 95 % interval sealed before them`;
  return `Of ${all} sealed prediction${all === 1 ? "" : "s"} ${counted}${rest.length > 0 ? `; ${rest.join(", ")}` : ""}.`;
}

/** The count as `--json` gives it. */
export function sealCountDocument(seals: readonly SealCounted[], count: SealCount): Record<string, unknown> {
  const round = (v: number) => Number(v.toPrecision(6));
  const mean = (m: SealCount["misses"]["index"]) =>
    m && { ours: round(m.ours), tuned_ewma: round(m.rival), runs: m.runs };
  const held = (h: SealCounted["index"]) =>
    h && {
      read: round(h.read),
      inside: h.inside,
      miss: round(h.miss),
      tuned_ewma_miss: h.rivalMiss === null ? null : round(h.rivalMiss),
    };
  return {
    fates: count.fates,
    inside_95: { index: count.inside.index, thickness_nm: count.inside.thicknessNm },
    mean_miss: { index: mean(count.misses.index), thickness_nm: mean(count.misses.thicknessNm) },
    says: count.says,
    seals: seals.map(({ note, hash, fate, chamber, run, index, thicknessNm }) => ({
      note,
      hash,
      fate,
      chamber,
      run,
      index: held(index),
      thickness_nm: held(thicknessNm),
    })),
  };
}
