/**
 * The calibrated line: every chamber's model, each leaning on its sisters. The pipeline, each step usable alone:
 * layout (which coefficients the history can teach) -> prepared rows -> a pass a chamber and node under "some chamber of
 * this line" -> for a target chamber, what the sisters say -> its own pass from there -> node weights -> ChamberModel.
 */
import { refuse } from "../engine/index.ts";
import { emptyForecasts, type Forecasts, type Node, runEvents, startState } from "./chamber-filter.ts";
import { ChamberModel, type NodePass } from "./chamber-model.ts";
import { type FacetFactor, facetFactor } from "./facet.ts";
import { filmResponse, type Lever } from "./film-response.ts";
import type { Bias } from "./gauge-bias.ts";
import { type LightLink, lightLink, type MinimumOf, type WeightedOf } from "./light-link.ts";
import { hyperNodes } from "./nodes.ts";
import { type Layout, layoutFor, type PreparedLog, prepare } from "./prepare.ts";
import { type PriorOverrides, priorsWith } from "./priors.ts";
import type { ChamberLog, Settings } from "./run.ts";
import { coefficientLaw, drawChamber, hearSister, type Law, stateOf } from "./sisters.ts";
import { copyState, type State } from "./square-root.ts";

export interface LearnOptions {
  levers: readonly Lever[];
  /** The recipe all levers are measured from; canonical units. */
  reference: Settings;
  /** What the reference recipe is meant to lay. */
  aim: { index: number | null; thicknessNm: number | null };
  /** Declared facet factor; {1, 0} on polished wafers. */
  facet: { mean: number; sd: number };
  /** Reflectance minimum of the coated cell, nm; null when there is no optics to lean on. */
  minimumOf: MinimumOf | null;
  /** Weighted reflectance of the coated cell; left out: such readings teach nothing. */
  weightedOf?: WeightedOf | null;
  /** What the line file states in place of the standard priors. */
  priors?: PriorOverrides;
  /** Every node starts, those split unevenly too: for studies, which want the prediction before each run without hindsight. */
  thorough?: boolean;
  /** What the gauge of the next reading reads too high now; left out where nobody knows. */
  gauge?: Bias;
}

/** A node on its way through a log. */
interface Hopeful {
  node: Node;
  start: State;
  state: State;
  /** Log weight before this log, and so far. */
  logBefore: number;
  logWeight: number;
  forecasts: Forecasts | null;
  /** Events run so far. */
  done: number;
}

/** Events between two looks at the race, and how many nats behind is hopeless: e^-12 is 6e-6 of the weight. */
const stretch = 8;
const hopeless = 12;
/**
 * A sister speaks with her latest measured runs only, this many: the slopes she lends are known to a few per cent of their
 * spread between chambers by then, and a long history would cost more time than it teaches.
 */
const heardRuns = 250;

interface GenericPass {
  generic: Law;
  posterior: Law;
  logDensity: number;
}

/** A node's way through a sister's log; its pass is made when first wanted. */
interface Lane {
  hopeful: Hopeful;
  inRace: boolean;
  pass: GenericPass | null;
}

interface GenericRace {
  generic: Law;
  /** One a node. */
  lanes: Lane[];
}

/** The fleet's law before any data, at a node. */
function fleetPrior(layout: Layout): Law {
  const p = layout.active.length;
  const covariance = new Float64Array(p * p);
  const mean = new Float64Array(p);
  layout.active.forEach((term, i) => {
    mean[i] = term.prior.mean;
    covariance[i * p + i] = term.prior.sd ** 2;
  });
  return { p, mean, covariance };
}

const spreadOf = (layout: Layout, node: Node) =>
  Float64Array.from(layout.active, (t) => (t.prior.spread * node.spread) ** 2);

export class LineModel {
  readonly layout: Layout;
  readonly facet: FacetFactor;
  readonly light: LightLink | null;
  private readonly prepared: Map<string, PreparedLog>;
  private readonly nodes: ReturnType<typeof hyperNodes>;
  private readonly generic = new Map<string, GenericRace>();
  private readonly models = new Map<string, ChamberModel>();

  constructor(
    readonly logs: readonly ChamberLog[],
    readonly options: LearnOptions,
  ) {
    const priors = priorsWith(options.priors);
    this.nodes = hyperNodes(priors.scatter);
    const response = filmResponse(options.levers, options.reference, options.aim, priors);
    this.layout = layoutFor(response, logs);
    this.prepared = new Map(logs.map((log) => [log.chamber, prepare(this.layout, log)]));
    const { minimumOf, weightedOf = null, facet } = options;
    this.facet = minimumOf ? facetFactor(facet, logs, minimumOf) : { ...facet, runs: 0, doubted: [] };
    this.light = minimumOf ? lightLink(minimumOf, weightedOf, this.facet) : null;
  }

  /** The model of one chamber. Refuses "unknown-chamber". */
  chamber(name: string): ChamberModel {
    const known = this.models.get(name);
    if (known) return known;
    const log = this.prepared.get(name);
    if (!log) refuse("unknown-chamber", `no chamber ${name}`, { hint: [...this.prepared.keys()].join(", ") });
    const sisters = [...this.prepared.values()].filter((other) => other !== log && readings(other) > 0);
    const hopefuls: Hopeful[] = [];
    const prior = fleetPrior(this.layout);
    const said = this.saidBySisters(sisters);
    this.nodes.forEach(({ node, logPrior }, i) => {
      let fleet = prior;
      let logWeight = logPrior;
      const spread = spreadOf(this.layout, node);
      for (const passes of said) {
        const generic = passes[i];
        if (!generic) return;
        const heard = hearSister(fleet, spread, generic);
        fleet = heard.fleet;
        logWeight += heard.logDensity;
      }
      const start = startState(stateOf(drawChamber(fleet, spread)), node);
      hopefuls.push({
        node,
        start,
        state: copyState(start),
        logBefore: logWeight,
        logWeight,
        forecasts: emptyForecasts(),
        done: 0,
      });
    });
    const passes = this.raceInRounds(log, hopefuls).map(
      (h): NodePass => ({ ...h, logAfter: h.logWeight, forecasts: h.forecasts ?? emptyForecasts() }),
    );
    const entrants = hopefuls.map((h) => ({ ...h, forecasts: h.forecasts ?? emptyForecasts() }));
    const model = new ChamberModel(this.layout, log, passes, {
      entrants,
      sisters: sisters.map((s) => ({ chamber: s.chamber, readings: readings(s) })),
      light: this.light,
      gauge: this.options.gauge,
    });
    this.models.set(name, model);
    return model;
  }

  /**
   * What each sister says, per node; null where the node is out. Sisters race apart, and a node that is hopeless for one may
   * lead for another: where none is left for all of them, those that any sister kept are run to the end for the others too.
   */
  private saidBySisters(sisters: readonly PreparedLog[]): (GenericPass | null)[][] {
    const races = sisters.map((sister) => this.genericRace(sister));
    const keptBy = (every: boolean) =>
      this.nodes.map((_, i) =>
        every ? races.every(({ lanes }) => lanes[i].inRace) : races.some(({ lanes }) => lanes[i].inRace),
      );
    const common = keptBy(true);
    const wanted = common.some((kept) => kept) ? common : keptBy(false);
    return races.map(({ generic, lanes }, s) =>
      lanes.map((lane, i) => {
        if (!wanted[i]) return null;
        if (!lane.pass) {
          const h = lane.hopeful;
          this.advance(sisters[s], h, sisters[s].events.length);
          lane.pass = { generic, posterior: coefficientLaw(h.state), logDensity: h.logWeight - h.logBefore };
        }
        return lane.pass;
      }),
    );
  }

  /**
   * A chamber's own data run at every node under the law of some chamber of this line; shared by all its sisters. The chamber
   * spread matters only through the prior, which `hearSister` swaps, so one lane serves all its values.
   */
  private genericRace(log: PreparedLog): GenericRace {
    let known = this.generic.get(log.chamber);
    if (!known) {
      const widest = Math.max(...this.nodes.map(({ node }) => node.spread));
      const [wide] = this.nodes.filter(({ node }) => node.spread === widest);
      const generic = drawChamber(fleetPrior(this.layout), spreadOf(this.layout, wide.node));
      const hopefuls = this.nodes.flatMap(({ node, logPrior }): Hopeful[] => {
        if (node.spread !== widest) return [];
        const start = startState(stateOf(generic), node);
        const state = copyState(start);
        const done = firstHeard(log);
        return [{ node, start, state, logBefore: logPrior, logWeight: logPrior, forecasts: null, done }];
      });
      const left = new Set(this.raceInRounds(log, hopefuls));
      const lanes = hopefuls.map((hopeful): Lane => ({ hopeful, inRace: left.has(hopeful), pass: null }));
      known = {
        generic,
        lanes: this.nodes.map(({ node }) => {
          const same = lanes.find(
            ({ hopeful: { node: n } }) =>
              n.process === node.process && n.balance === node.balance && n.step === node.step,
          );
          return same ?? refuse("no-node", "a node without a lane");
        }),
      };
      this.generic.set(log.chamber, known);
    }
    return known;
  }

  /**
   * First the nodes whose process scatter is split evenly; then, of those left, the ones split otherwise: three times the grid at
   * little more than its cost.
   */
  private raceInRounds(log: PreparedLog, hopefuls: readonly Hopeful[]): Hopeful[] {
    if (this.options.thorough) return this.race(log, hopefuls);
    const even = this.race(
      log,
      hopefuls.filter(({ node }) => node.balance === 1),
    );
    const split = this.race(
      log,
      hopefuls.filter(({ node }) => node.balance !== 1 && even.some((h) => besides(h.node, node))),
    );
    const left = [...even, ...split];
    const best = Math.max(...left.map((h) => h.logWeight));
    return left.filter((h) => h.logWeight > best - hopeless);
  }

  /** Runs the log at every node, in stretches, dropping nodes that have fallen hopelessly behind. Returns those left. */
  private race(log: PreparedLog, hopefuls: readonly Hopeful[]): Hopeful[] {
    let left = [...hopefuls];
    const first = left[0]?.done ?? 0;
    for (let from = first; from < log.events.length; from += stretch) {
      const to = Math.min(from + stretch, log.events.length);
      for (const h of left) this.advance(log, h, to);
      const best = Math.max(...left.map((h) => h.logWeight));
      left = left.filter((h) => h.logWeight > best - hopeless);
    }
    return left;
  }

  private advance(log: PreparedLog, h: Hopeful, to: number): void {
    const options = {
      from: h.done,
      to,
      forecasts: h.forecasts ?? undefined,
      light: this.light,
      logBefore: h.logWeight - h.logBefore,
    };
    h.logWeight += runEvents(h.state, this.layout, log, h.node, options);
    h.done = to;
  }
}

/** Are two nodes the same but for how the process scatter is split? */
const besides = (one: Node, other: Node): boolean =>
  one.process === other.process && one.step === other.step && one.spread === other.spread;

/** The event from which on a sister's log is heard. */
function firstHeard(log: PreparedLog): number {
  let runs = 0;
  for (let at = log.events.length - 1; at >= 0; at--) {
    if (log.events[at].kind === "run") runs++;
    if (runs === heardRuns) return at;
  }
  return 0;
}

/** Runs of a log with something read. */
export function readings(log: PreparedLog): number {
  return log.events.filter((e) => e.kind === "run").length;
}
