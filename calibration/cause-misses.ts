/**
 * What was read since an onset beside what the chamber, as known before it, was expected to lay; and which of the two
 * properties a cause leaves unexplained.
 */
import { delivered, type Onset, ordinary, type Ready, type Scene, type Suspect, tell } from "./cause-evidence.ts";
import { filmAt, processVariance } from "./chamber-filter.ts";
import { type PreparedRun, rows } from "./prepare.ts";
import { varianceAlong } from "./square-root.ts";

/** Mean miss over the runs, of index or of ln thickness, and the sd it would have if nothing had changed. */
export interface Miss {
  mean: number;
  sd: number;
}

/** A measured run beside what was expected of it. */
export interface MissedRun {
  entry: number;
  index: number | null;
  thicknessNm: number | null;
  expectedIndex: { mean: number; sd: number };
  expectedThickness: { mean: number; sd: number };
}

export interface Misses {
  runs: MissedRun[];
  miss: { index: Miss | null; lnThickness: Miss | null };
}

/** Standard deviations from which a property counts as unexplained. */
const unexplained = 2;

/** The runs since the onset beside what was expected of them before it, and their mean miss with its sd were nothing wrong. */
export function missesOf(scene: Scene, ready: readonly Ready[], onset: Onset, to: number): Misses {
  const { model, layout } = scene;
  const blind = ready.map((node) => tell(scene, node, onset, ordinary, { to, blind: true }).state);
  const events = model.log.events.slice(onset.at, to).filter((e): e is PreparedRun => e.kind === "run");
  const film = (hIndex: Float64Array, hRate: Float64Array, noise: (node: Ready) => readonly [number, number]) => {
    const parts = ready.map((node, i) => ({ weight: node.weight, ...filmAt(blind[i], hIndex, hRate, noise(node)) }));
    const mean = (of: (p: (typeof parts)[number]) => number) => parts.reduce((s, p) => s + p.weight * of(p), 0);
    const index = mean((p) => p.index);
    const rate = mean((p) => p.rate);
    return {
      index,
      rate,
      vIndex: mean((p) => p.covariance[0] + (p.index - index) ** 2),
      vRate: mean((p) => p.covariance[2] + (p.rate - rate) ** 2),
    };
  };
  const runs = events.map((run) => {
    const { hIndex, hRate } = rows(layout, run.settings, run.k);
    const f = film(hIndex, hRate, (node) => processVariance(node.node));
    const d = Math.exp(f.rate + run.known);
    const lnD = run.yRate + run.known;
    return {
      entry: run.entry,
      index: Number.isFinite(run.yIndex) ? run.yIndex : null,
      thicknessNm: Number.isFinite(lnD) ? Math.exp(lnD) : null,
      expectedIndex: { mean: f.index, sd: Math.sqrt(f.vIndex + run.gauge[0]) },
      expectedThickness: { mean: d, sd: d * Math.sqrt(f.vRate + run.gauge[2]) },
    };
  });
  const meanMiss = (which: 0 | 1): Miss | null => {
    const read = events.filter((run) => Number.isFinite(which === 0 ? run.yIndex : run.yRate));
    if (read.length === 0) return null;
    const row = new Float64Array(layout.n);
    const none = new Float64Array(layout.n);
    let y = 0;
    let gauge = 0;
    for (const run of read) {
      const { hIndex, hRate } = rows(layout, run.settings, run.k);
      (which === 0 ? hIndex : hRate).forEach((v, i) => {
        row[i] += v / read.length;
      });
      y += (which === 0 ? run.yIndex : run.yRate) / read.length;
      gauge += run.gauge[which === 0 ? 0 : 2] / read.length ** 2;
    }
    const noise = (node: Ready): readonly [number, number] => {
      const [n, l] = processVariance(node.node);
      return [n / read.length, l / read.length];
    };
    const f = which === 0 ? film(row, none, noise) : film(none, row, noise);
    return which === 0
      ? { mean: y - f.index, sd: Math.sqrt(f.vIndex + gauge) }
      : { mean: y - f.rate, sd: Math.sqrt(f.vRate + gauge) };
  };
  return { runs, miss: { index: meanMiss(0), lnThickness: meanMiss(1) } };
}

/** The properties that a cause of size e leaves unexplained: the miss less what the cause does, in standard deviations. */
export function refusedBy(
  scene: Scene,
  ready: Ready,
  onset: Onset,
  suspect: Suspect,
  e: number,
  { miss }: Misses,
): ("index" | "rate")[] {
  const effect = effectOf(scene, ready, onset, suspect, e);
  const out: ("index" | "rate")[] = [];
  for (const [name, m, does, i] of [
    ["index", miss.index, effect.index, 0],
    ["rate", miss.lnThickness, effect.lnThickness, 1],
  ] as const) {
    if (m === null) continue;
    const { scatter } = ready.node;
    const own = onset.kind === "service" ? scatter.service[i] : scatter.step[i] * ready.node.step;
    const step = suspect.kind === "step" ? own : 0;
    if (Math.abs(m.mean - does.mean) > unexplained * Math.hypot(m.sd, does.sd, step)) out.push(name);
  }
  return out;
}

/** What a cause of size e does to index and ln thickness at the settings of the first run since the onset. */
export function effectOf(
  scene: Scene,
  ready: Ready,
  onset: Onset,
  suspect: Suspect,
  e: number,
): { index: Miss; lnThickness: Miss } {
  const { kind } = suspect;
  const sure = (index: number, lnThickness: number) => ({
    index: { mean: index, sd: 0 },
    lnThickness: { mean: lnThickness, sd: 0 },
  });
  if (kind === "gauge index" || kind === "leak") return sure(e, 0);
  if (kind === "gauge thickness") return sure(0, Math.log1p(e));
  const run = scene.model.log.events.slice(onset.at).find((event) => event.kind === "run");
  if (kind !== "setting" || run?.kind !== "run") return sure(0, 0);
  const { layout } = scene;
  const to = delivered(run.settings, suspect, e);
  const a = rows(layout, run.settings, run.k);
  const b = rows(layout, to, run.k);
  const along = (from: Float64Array, until: Float64Array): Miss => {
    const h = until.map((v, i) => v - from[i]);
    return {
      mean: h.reduce((sum, v, i) => sum + v * ready.state.mean[i], 0),
      sd: Math.sqrt(varianceAlong(ready.state, h)),
    };
  };
  const rate = along(a.hRate, b.hRate);
  rate.mean += layout.response.known(to) - layout.response.known(run.settings);
  return { index: along(a.hIndex, b.hIndex), lnThickness: rate };
}
