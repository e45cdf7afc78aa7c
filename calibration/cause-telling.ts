/**
 * The run that would tell: how far the causes still in question part in what the next run would read at given settings.
 * Each cause has a law for that reading (over its sizes, slopes uncertain); two laws are compared by the Bhattacharyya
 * coefficient, which is 1 where they are the same and bounds the chance of mistaking one for the other.
 */
import { delivered, type Onset, type Ready, type Scene, type Suspect, tell } from "./cause-evidence.ts";
import { filmAt, processVariance } from "./chamber-filter.ts";
import { type PreparedRun, rows } from "./prepare.ts";
import type { Settings } from "./run.ts";

export interface TellingRun {
  settings: Settings;
  /** Share of the doubt between the causes that one reading at these settings is expected to remove, 0 to 1. */
  tells: number;
}

/** A cause in question: its chance, and its sizes with their posterior weights. */
export interface InQuestion {
  suspect: Suspect;
  probability: number;
  e: readonly number[];
  weights: readonly number[];
}

interface Law {
  mean: [number, number];
  /** [var index, cov, var ln thickness] */
  covariance: [number, number, number];
}

/** Sizes of less weight than this add nothing. */
const negligible = 1e-3;

/** How well each run would tell the causes apart. All zero where fewer than two are in question. */
export function tellingRuns(
  scene: Scene,
  ready: Ready,
  onset: Onset,
  causes: readonly InQuestion[],
  runs: readonly Settings[],
): TellingRun[] {
  if (causes.length < 2) return runs.map((settings) => ({ settings, tells: 0 }));
  const after = causes.map((cause) => ({
    ...cause,
    states: cause.e.flatMap((e, i) =>
      cause.weights[i] < negligible
        ? []
        : [
            {
              e,
              weight: cause.weights[i],
              state: tell(scene, ready, onset, { suspect: cause.suspect, e, restart: false }).state,
            },
          ],
    ),
  }));
  const last = scene.model.log.events.findLast((event): event is PreparedRun => event.kind === "run");
  const gauge = last?.gauge ?? [0, 0, 0];
  return runs.map((settings) => {
    const laws = after.map(({ suspect, states }) => lawOf(scene, ready, suspect, states, settings, gauge));
    let doubt = 0;
    let left = 0;
    for (let i = 0; i < laws.length; i++)
      for (let j = 0; j < i; j++) {
        const both = causes[i].probability * causes[j].probability;
        doubt += both;
        left += both * overlap(laws[i], laws[j]);
      }
    return { settings, tells: doubt > 0 ? 1 - left / doubt : 0 };
  });
}

function lawOf(
  scene: Scene,
  ready: Ready,
  suspect: Suspect,
  states: readonly { e: number; weight: number; state: Ready["state"] }[],
  settings: Settings,
  gauge: readonly [number, number, number],
): Law {
  const { layout, model } = scene;
  const process = processVariance(ready.node);
  const total = states.reduce((sum, s) => sum + s.weight, 0);
  const parts = states.map(({ e, weight, state }) => {
    const real = delivered(settings, suspect, e);
    const { hIndex, hRate } = rows(layout, real, model.k);
    const film = filmAt(state, hIndex, hRate, process);
    return {
      weight: weight / total,
      index: film.index + (suspect.kind === "gauge index" ? e : 0),
      ln: film.rate + layout.response.known(real) + (suspect.kind === "gauge thickness" ? Math.log1p(e) : 0),
      covariance: film.covariance,
    };
  });
  const mean: Law["mean"] = [0, 0];
  for (const p of parts) {
    mean[0] += p.weight * p.index;
    mean[1] += p.weight * p.ln;
  }
  const covariance: Law["covariance"] = [...gauge];
  for (const p of parts) {
    const a = p.index - mean[0];
    const b = p.ln - mean[1];
    covariance[0] += p.weight * (p.covariance[0] + a * a);
    covariance[1] += p.weight * (p.covariance[1] + a * b);
    covariance[2] += p.weight * (p.covariance[2] + b * b);
  }
  return { mean, covariance };
}

/** Bhattacharyya coefficient of two bivariate normals (A. Bhattacharyya 1943, from memory). */
function overlap(a: Law, b: Law): number {
  const det = ([x, c, y]: readonly number[]) => x * y - c * c;
  const middle = a.covariance.map((v, i) => (v + b.covariance[i]) / 2);
  const dn = a.mean[0] - b.mean[0];
  const dl = a.mean[1] - b.mean[1];
  const [x, c, y] = middle;
  const far = (dn * dn * y - 2 * dn * dl * c + dl * dl * x) / det(middle);
  return Math.exp(-far / 8) * Math.sqrt(Math.sqrt(det(a.covariance) * det(b.covariance)) / det(middle));
}
