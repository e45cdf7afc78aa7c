/**
 * One chamber as it is believed to be after its whole history: predictions for any settings, what was learned, and how
 * well past predictions held.
 */
import { cholesky } from "../engine/index.ts";
import { type Forecasts, filmAt, type Node, processVariance, stepVariance, walk } from "./chamber-filter.ts";
import type { FilmLaw, FilmPart } from "./film-law.ts";
import type { Term } from "./film-response.ts";
import { type Bias, noBias } from "./gauge-bias.ts";
import type { LightLink } from "./light-link.ts";
import { nodeWeights } from "./nodes.ts";
import { type Layout, type PreparedLog, type PreparedRun, rows } from "./prepare.ts";
import { hypothesisWeights } from "./priors.ts";
import type { GaugeCovariance, Settings } from "./run.ts";
import { copyState, covariance, type State, varianceAlong } from "./square-root.ts";

export interface NodePass {
  node: Node;
  /** State before the first event. */
  start: State;
  /** State after the last event. */
  state: State;
  forecasts: Forecasts;
  /** Log weight before and after this chamber's own readings. */
  logBefore: number;
  logAfter: number;
}

/** A coefficient as learned: posterior mean and sd (over nodes) beside its prior. */
export interface Coefficient {
  term: Term;
  mean: number;
  sd: number;
  priorSd: number;
  active: boolean;
}

export class ChamberModel {
  readonly chamber: string;
  readonly weights: readonly number[];
  /** Depositions since the last clean. */
  readonly k: number;
  private readonly next: readonly State[];

  constructor(
    readonly layout: Layout,
    readonly log: PreparedLog,
    readonly passes: readonly NodePass[],
    readonly context: {
      sisters: readonly { chamber: string; readings: number }[];
      light: LightLink | null;
      /** What the gauge of the next reading reads too high, where somebody knows. */
      gauge?: Bias;
      /** Every node that started, those dropped on the way included: their forecasts end where they were dropped. */
      entrants: readonly Omit<NodePass, "logAfter">[];
    },
  ) {
    this.chamber = log.chamber;
    this.k = log.k;
    this.weights = nodeWeights(passes.map((p) => p.logAfter));
    this.next = passes.map((pass) => {
      const state = copyState(pass.state);
      walk(state, pass.node, 1);
      return state;
    });
  }

  /** Measured runs in this chamber's own log. */
  get ownReadings(): number {
    return this.passes[0].forecasts.runs.length;
  }

  /** The true film of the next deposition at these settings, on a polished witness; process scatter in, gauge out. */
  law(settings: Settings): FilmLaw {
    const parts: FilmPart[] = [];
    const unlogged = hypothesisWeights[2];
    for (const { film, weight, node } of this.each(settings)) {
      const [a, c, b] = film.covariance;
      const step = stepVariance(node);
      parts.push({ weight: weight * (1 - unlogged), ...film });
      parts.push({ weight: weight * unlogged, ...film, covariance: [a + step[0], c, b + step[1]] });
    }
    return { parts };
  }

  /**
   * What the gauge would read of that film: the same with its inexactness, bad measurements included, and what it reads too
   * high with the uncertainty of that.
   */
  measuredLaw(settings: Settings, gauge: GaugeCovariance, bias: Bias = this.context.gauge ?? noBias): FilmLaw {
    const parts: FilmPart[] = [];
    const [ordinary, bad, unlogged] = hypothesisWeights;
    for (const { film: real, weight, node } of this.each(settings)) {
      const thickness = Math.exp(real.lnThickness);
      const d = Math.max(thickness + bias.thicknessNm, 0.5 * thickness);
      const film = { index: real.index + bias.index, lnThickness: Math.log(d) };
      const a = real.covariance[0] + gauge[0] + bias.covariance[0];
      const c = (real.covariance[1] * thickness + gauge[1] + bias.covariance[1]) / d;
      const b = (real.covariance[2] * thickness ** 2 + gauge[2] + bias.covariance[2]) / (d * d);
      const step = stepVariance(node);
      parts.push({ weight: weight * ordinary, ...film, covariance: [a, c, b] });
      parts.push({
        weight: weight * bad,
        ...film,
        covariance: [a + node.scatter.badMeasurement[0] ** 2, c, b + node.scatter.badMeasurement[1] ** 2],
      });
      parts.push({ weight: weight * unlogged, ...film, covariance: [a + step[0], c, b + step[1]] });
    }
    return { parts };
  }

  /** Mean (index, ln thickness) and covariance of the true film, over nodes, without the unlogged-step tail: cheap, for searches. */
  quick(settings: Settings): { index: number; lnThickness: number; covariance: [number, number, number] } {
    this.pooled ??= this.pool();
    const { state, process } = this.pooled;
    const { hIndex, hRate } = rows(this.layout, settings, this.k);
    const film = filmAt(state, hIndex, hRate, process);
    for (const term of this.layout.idle) {
      const x = term.value(settings, this.k);
      if (x === 0) continue;
      const variance = (term.prior.sd ** 2 + term.prior.spread ** 2) * x * x;
      if (term.output === "index") {
        film.index += term.prior.mean * x;
        film.covariance[0] += variance;
      } else {
        film.rate += term.prior.mean * x;
        film.covariance[2] += variance;
      }
    }
    return {
      index: film.index,
      lnThickness: film.rate + this.layout.response.known(settings),
      covariance: film.covariance,
    };
  }

  private pooled: { state: State; process: [number, number] } | null = null;

  /** The nodes' mixture as one state with its mean and covariance, and the mean process variance. */
  private pool(): { state: State; process: [number, number] } {
    const n = this.layout.n;
    const mean = new Float64Array(n);
    const process: [number, number] = [0, 0];
    this.next.forEach((s, i) => {
      for (let j = 0; j < n; j++) mean[j] += this.weights[i] * s.mean[j];
      const p = processVariance(this.passes[i].node);
      process[0] += this.weights[i] * p[0];
      process[1] += this.weights[i] * p[1];
    });
    const pooled = new Float64Array(n * n);
    this.next.forEach((s, i) => {
      const w = this.weights[i];
      if (w < 1e-9) return;
      const p = covariance(s);
      for (let a = 0; a < n; a++)
        for (let b = 0; b < n; b++)
          pooled[a * n + b] += w * (p[a * n + b] + (s.mean[a] - mean[a]) * (s.mean[b] - mean[b]));
    });
    return { state: { n, mean, factor: cholesky(pooled, n) }, process };
  }

  private *each(settings: Settings): Generator<{ film: Omit<FilmPart, "weight">; weight: number; node: Node }> {
    const { hIndex, hRate } = rows(this.layout, settings, this.k);
    const known = this.layout.response.known(settings);
    const idle = this.layout.idle.map((term) => ({ term, x: term.value(settings, this.k) })).filter((i) => i.x !== 0);
    for (let i = 0; i < this.passes.length; i++) {
      const weight = this.weights[i];
      if (weight < 1e-6) continue;
      const { node } = this.passes[i];
      const at = filmAt(this.next[i], hIndex, hRate, processVariance(node));
      let { index, rate } = at;
      const covariance: [number, number, number] = [...at.covariance];
      for (const { term, x } of idle) {
        const variance = (term.prior.sd ** 2 + (term.prior.spread * node.spread) ** 2) * x * x;
        if (term.output === "index") {
          index += term.prior.mean * x;
          covariance[0] += variance;
        } else {
          rate += term.prior.mean * x;
          covariance[2] += variance;
        }
      }
      yield { film: { index, lnThickness: rate + known, covariance }, weight, node };
    }
  }

  /** Every coefficient with its posterior over nodes. */
  coefficients(): Coefficient[] {
    const out: Coefficient[] = [];
    const n = this.layout.n;
    this.layout.active.forEach((term, at) => {
      const h = new Float64Array(n);
      h[at] = 1;
      out.push({ term, ...this.combination(h), priorSd: Math.hypot(term.prior.sd, term.prior.spread), active: true });
    });
    for (const term of this.layout.idle) {
      const sd = Math.hypot(term.prior.sd, term.prior.spread);
      out.push({ term, mean: term.prior.mean, sd, priorSd: sd, active: false });
    }
    return out;
  }

  /** Mean and sd over nodes of a linear combination of the state. */
  combination(h: Float64Array): { mean: number; sd: number } {
    let mean = 0;
    let second = 0;
    this.passes.forEach((pass, i) => {
      const w = this.weights[i];
      let m = 0;
      for (let j = 0; j < h.length; j++) m += h[j] * pass.state.mean[j];
      mean += w * m;
      second += w * (m * m + varianceAlong(pass.state, h));
    });
    return { mean, sd: Math.sqrt(Math.max(second - mean * mean, 0)) };
  }

  /** How much more index and thickness the settings `to` give than `from`: the slope people ask for. */
  effect(
    from: Settings,
    to: Settings,
  ): { index: { mean: number; sd: number }; lnThickness: { mean: number; sd: number } } {
    const a = rows(this.layout, from, this.k);
    const b = rows(this.layout, to, this.k);
    const index = this.combination(b.hIndex.map((v, i) => v - a.hIndex[i]));
    const rate = this.combination(b.hRate.map((v, i) => v - a.hRate[i]));
    let indexVariance = index.sd ** 2;
    let rateVariance = rate.sd ** 2;
    for (const term of this.layout.idle) {
      const x = term.value(to, this.k) - term.value(from, this.k);
      const variance = (term.prior.sd ** 2 + term.prior.spread ** 2) * x * x;
      if (term.output === "index") {
        index.mean += term.prior.mean * x;
        indexVariance += variance;
      } else {
        rate.mean += term.prior.mean * x;
        rateVariance += variance;
      }
    }
    const known = this.layout.response.known(to) - this.layout.response.known(from);
    return {
      index: { mean: index.mean, sd: Math.sqrt(indexVariance) },
      lnThickness: { mean: rate.mean + known, sd: Math.sqrt(rateVariance) },
    };
  }

  /** The measured runs, oldest first. */
  get runs(): readonly PreparedRun[] {
    return this.passes[0].forecasts.runs;
  }

  /** Process variance (index, ln thickness) averaged over nodes: the scatter nobody can know beforehand. */
  get processScatter(): [number, number] {
    this.pooled ??= this.pool();
    return this.pooled.process;
  }
}
