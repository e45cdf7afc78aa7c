/**
 * What a chamber's history cannot tell: settings that never moved, that moved too little against the scatter, at two
 * levels only, or only ever together. Said in words with the run that would tell; predictions stay honest either way,
 * because an untold coefficient keeps its prior's width.
 *
 * Together: the settings that moved are columns of logarithms (degrees as they are), standardised; the eigenvectors of
 * their correlation matrix with next to nothing left are the combinations that never moved (principal components).
 */
import { symmetricEigen } from "../engine/index.ts";
import type { ChamberModel } from "./chamber-model.ts";
import type { Lever } from "./film-response.ts";

export interface Untold {
  /** Settings concerned. */
  settings: string[];
  kind: "never moved" | "moved together" | "hardly moved" | "two levels" | "too few runs" | "more";
  sentence: string;
}

export interface UntoldOptions {
  /** How a run that moves a setting by a fraction reads: "ammonia at 7100 sccm instead of 6890 sccm". Null: it cannot be. */
  move?: (setting: string, by: number) => string | null;
  /** Settings that may be tuned: what cannot be told of them matters most. All, when left out. */
  tunable?: ReadonlySet<string>;
  /** The most important so many are told, the rest counted. */
  most?: number;
}

/** A setting that moved, as a column over the measured runs. */
interface Column {
  name: string;
  meaning: string | null;
  values: number[];
  spread: number;
  /** Differing values, those within a thousandth of each other counted once. */
  levels: number[];
}

/** Under this spread a setting stood still, whatever rounding did to it. */
const still = 1e-6;
/** Values nearer than this (relative; degrees) are one level. */
const sameLevel = 1e-3;
/** A pair this correlated, and a combination with this share of a single setting's variance, never moved apart. */
const paired = 0.985;
const leftOver = 0.01;
/** Settings with a loading above this belong to a combination. */
const belongs = 0.3;
/** The move a run is asked for, in a fraction of the setting. */
const asked = 0.03;

const isWarm = (meaning: string | null) => meaning === "temperature" || (meaning?.startsWith("zone_") ?? false);

/** Names what the measured runs of this chamber leave open, the most important first. Empty without measured runs. */
export function untold(model: ChamberModel, levers: readonly Lever[], options: UntoldOptions = {}): Untold[] {
  const { move = byPercent, tunable, most = 4 } = options;
  const { runs } = model;
  if (runs.length === 0) return [];
  const columns = columnsOf(model, levers);
  const moving = columns.filter((c) => c.spread >= still);
  const names = columns.filter((c) => c.spread < still).map((c) => c.name);
  const faint = moving.filter((c) => isFaint(model, c));
  const clear = moving.filter((c) => !faint.includes(c));
  const found: Untold[] = [
    ...ratioAndFlow(columns, clear, move),
    ...together(clear, runs.length, move),
    ...neverMoved(names, runs.length, move, tunable),
    ...hardlyMoved(faint, move),
    ...twoLevels(clear, move),
  ];
  const matters = (u: Untold) => (tunable === undefined || u.settings.some((s) => tunable.has(s)) ? 0 : 1);
  const sorted = found.map((u, i) => ({ u, i })).sort((a, b) => matters(a.u) - matters(b.u) || a.i - b.i);
  const shown = sorted.slice(0, most).map(({ u }) => u);
  const rest = sorted.slice(most).map(({ u }) => u);
  if (rest.length > 0)
    shown.push({
      settings: [...new Set(rest.flatMap((u) => u.settings))],
      kind: "more",
      sentence: `${rest.length} more of the kind: ${rest.map((u) => `${list(u.settings)} ${u.kind}`).join("; ")}.`,
    });
  return shown;
}

const byPercent = (setting: string, by: number): string =>
  `${setting} ${Math.abs(100 * by).toFixed(0)} % ${by < 0 ? "lower" : "higher"}`;

function columnsOf({ runs }: ChamberModel, levers: readonly Lever[]): Column[] {
  return levers.flatMap(({ setting, meaning }) => {
    const raw = runs.map((r) => r.settings.get(setting)).filter((v): v is number => v !== undefined);
    if (raw.length < runs.length) return [];
    const logs = !isWarm(meaning) && raw.every((v) => v > 0);
    const values = logs ? raw.map(Math.log) : raw;
    const levels: number[] = [];
    for (const v of [...values].sort((a, b) => a - b))
      if (levels.length === 0 || v - levels[levels.length - 1] > (logs ? sameLevel : 0.1)) levels.push(v);
    return [{ name: setting, meaning, values, spread: sd(values), levels }];
  });
}

/**
 * Moved too little against the scatter: what the chamber's own runs could at best tell of the setting's effect on the
 * thickness, scatter / (spread x root of the runs), is no sharper than what was thought before. Time is spared: that film
 * grows with it needs no learning.
 */
function isFaint(model: ChamberModel, column: Column): boolean {
  if (column.meaning === "time" || column.meaning === "belt_speed") return false;
  const terms = [...model.layout.active, ...model.layout.idle].filter((t) => t.movedBy.includes(column.name));
  const scatter = model.processScatter;
  const reach = column.spread * Math.sqrt(column.values.length);
  // Sharper on either property is something told.
  return (["index", "rate"] as const).every((output, i) => {
    const prior = Math.hypot(...terms.filter((t) => t.output === output).map((t) => slopePrior(t.name, t.prior)));
    return Math.sqrt(scatter[i]) / reach > prior;
  });
}

/** The curvature is no slope: at small moves it counts nothing. */
const slopePrior = (name: string, prior: { sd: number; spread: number }) =>
  name === "ratio squared" ? 0 : Math.hypot(prior.sd, prior.spread);

type Move = NonNullable<UntoldOptions["move"]>;

/** "A run with ... would tell." or nothing where the window has no room either way. */
function wouldTell(setting: string, move: Move): string {
  const run = move(setting, asked) ?? move(setting, -asked);
  return run === null ? "" : ` A run with ${run} would tell.`;
}

function neverMoved(names: string[], runs: number, move: Move, tunable?: ReadonlySet<string>): Untold[] {
  if (names.length === 0) return [];
  const one = names.length === 1;
  const first = names.find((name) => tunable?.has(name));
  const tell = first ? wouldTell(first, move) : "";
  return [
    {
      settings: names,
      kind: "never moved",
      sentence: `${list(names)} never moved in this chamber's ${runs} measured run${runs === 1 ? "" : "s"}: what ${one ? "it does" : "they do"} is taken from sisters or from the prior.${tell}`,
    },
  ];
}

function hardlyMoved(faint: readonly Column[], move: Move): Untold[] {
  if (faint.length === 0) return [];
  const names = faint.map((c) => c.name);
  const widest = Math.max(...faint.map((c) => c.spread));
  const run = move(names[0], asked) ?? move(names[0], -asked);
  return [
    {
      settings: names,
      kind: "hardly moved",
      sentence: `${list(names)} moved too little against the scatter to say what ${names.length > 1 ? "they do" : "it does"} alone (sd ${(100 * widest).toFixed(1)} %${names.length > 1 ? " at most" : ""}).${run ? ` One run with ${run} would tell more than ten like these.` : ""}`,
    },
  ];
}

/** The special case every line knows: one gas moved, the other did not, or both kept their ratio or their sum. */
function ratioAndFlow(columns: readonly Column[], moving: readonly Column[], move: Move): Untold[] {
  const silane = columns.find((c) => c.meaning === "silane");
  const ammonia = columns.find((c) => c.meaning === "ammonia");
  if (!silane || !ammonia) return [];
  const [s, a] = [moving.includes(silane), moving.includes(ammonia)];
  if (s === a || (s && ammonia.spread >= still) || (a && silane.spread >= still)) return [];
  const [only, other] = s ? [silane, ammonia] : [ammonia, silane];
  return [
    {
      settings: [silane.name, ammonia.name],
      kind: "moved together",
      sentence: `Only ${only.name} moved, never ${other.name}: gas ratio and total flow cannot be told apart.${wouldTell(other.name, move)}`,
    },
  ];
}

/** Combinations of the settings that moved which never moved: pairs first, then what is left of the correlation matrix. */
function together(columns: readonly Column[], runs: number, move: Move): Untold[] {
  if (columns.length < 2) return [];
  // Fewer runs than settings, and one for the offset: some combination must be untold, whatever the values.
  if (runs <= columns.length)
    return [
      {
        settings: columns.map((c) => c.name),
        kind: "too few runs",
        sentence: `${runs} measured runs moved ${columns.length} settings (${list(columns.map((c) => c.name))}): at least ${columns.length + 1} are needed to tell them apart.`,
      },
    ];
  const out: Untold[] = [];
  const taken = new Set<Column>();
  for (let i = 0; i < columns.length; i++)
    for (let j = i + 1; j < columns.length; j++) {
      const [a, b] = [columns[i], columns[j]];
      const r = correlation(a.values, b.values);
      if (Math.abs(r) <= paired || taken.has(b)) continue;
      taken.add(b);
      out.push(pair(a, b, r, move));
    }
  const left = columns.filter((c) => !taken.has(c));
  const n = left.length;
  if (n < 3) return out;
  const matrix = new Float64Array(n * n);
  for (let i = 0; i < n; i++)
    for (let j = 0; j < n; j++) matrix[i * n + j] = i === j ? 1 : correlation(left[i].values, left[j].values);
  for (let i = 0; i < n; i++) for (let j = 0; j < i; j++) matrix[i * n + j] = matrix[j * n + i];
  const { values, vectors } = symmetricEigen(matrix, n);
  for (let k = 0; k < n; k++) {
    if (values[k] > leftOver) continue;
    const members = left.filter((_, i) => Math.abs(vectors[i * n + k]) > belongs);
    if (members.length < 2) continue;
    out.push({
      settings: members.map((c) => c.name),
      kind: "moved together",
      sentence: `${list(members.map((c) => c.name))} moved by one rule all along: their effects cannot be told apart.${wouldTell(members[members.length - 1].name, move)}`,
    });
  }
  return out;
}

function pair(a: Column, b: Column, r: number, move: Move): Untold {
  const gases = [a.meaning, b.meaning].sort().join() === "ammonia,silane";
  const likewise = Math.abs(a.spread / b.spread - 1) < 0.1 && r > 0;
  const what =
    gases && likewise
      ? "the gas ratio never moved, total flow alone did"
      : gases
        ? "gas ratio and total flow cannot be told apart"
        : "their effects cannot be told apart";
  return {
    settings: [a.name, b.name],
    kind: "moved together",
    sentence: `${a.name} and ${b.name} always moved together (correlation ${r.toFixed(3)}): ${what}.${wouldTell(b.name, move)}`,
  };
}

/** Only the gases bend in the model; for them two levels leave the bend to the prior. */
function twoLevels(columns: readonly Column[], move: Move): Untold[] {
  const gases = columns.filter((c) => c.meaning === "silane" || c.meaning === "ammonia");
  if (gases.length === 0 || gases.some((c) => c.levels.length > 2)) return [];
  const names = gases.map((c) => c.name);
  return [
    {
      settings: names,
      kind: "two levels",
      sentence: `${list(names)} ran at two levels only: whether the index bends with the gas ratio cannot be told.${wouldTell(names[0], move)}`,
    },
  ];
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
