/**
 * The chance that the next film lies in a region of index and thickness, with conditions beyond a box (a limit in
 * reflectance, say) asked of a function. The film is the mixture of film-law.ts.
 */
import { gaussLegendre, normalCdf } from "../engine/index.ts";
import type { FilmLaw, FilmPart } from "./film-law.ts";

/**
 * Where the film must lie. Open sides are infinite. `also`, all of them, must be <= 0 as well; they are asked at the
 * thickness times a factor that is itself known as a distribution, of which `factors` are the points (1 when left out).
 */
export interface GoalRegion {
  index: readonly [number, number];
  thicknessNm: readonly [number, number];
  also: readonly ((index: number, thicknessNm: number) => number)[];
  factors?: readonly { factor: number; weight: number }[];
  /** What was asked of `also` so far, by index; give one to share it between chances in the same region. */
  cuts?: Map<number, Cut>;
}

const asItIs = [{ factor: 1, weight: 1 }] as const;

/** Most cuts kept in a region: those of a few hundred chances, since parts that reach past the goal share their nodes. */
const mostCuts = 600;

/**
 * Chance that the film lies in the region: Gauss-Legendre over the index, exact normal differences in ln thickness given
 * the index (methods of conditional integration; tensor Gauss-Hermite is off by several per cent on indicator functions).
 * With `also`, the allowed stretches of thickness are those of a `Cut`.
 */
export function chanceIn(law: FilmLaw, region: GoalRegion): number {
  const rule = gaussLegendre(20);
  const cuts = region.cuts ?? new Map<number, Cut>();
  if (cuts.size > mostCuts) cuts.clear();
  let total = 0;
  for (const part of law.parts) {
    if (part.weight < 1e-9) continue;
    total += part.weight * chanceInPart(part, region, rule, cuts);
  }
  return Math.min(1, Math.max(0, total));
}

function chanceInPart(
  part: FilmPart,
  region: GoalRegion,
  rule: { nodes: Float64Array; weights: Float64Array },
  cuts: Map<number, Cut>,
): number {
  const vn = part.covariance[0];
  const cov = part.covariance[1];
  const sn = Math.sqrt(vn);
  const low = Math.max(region.index[0], part.index - 6 * sn);
  const high = Math.min(region.index[1], part.index + 6 * sn);
  if (!(high > low)) return 0;
  const slope = cov / vn;
  const sl = Math.sqrt(Math.max(part.covariance[2] - slope * cov, 1e-18));
  let sum = 0;
  for (let i = 0; i < rule.nodes.length; i++) {
    const index = 0.5 * (low + high) + 0.5 * (high - low) * rule.nodes[i];
    const u = (index - part.index) / sn;
    const density = Math.exp(-0.5 * u * u) / (sn * Math.sqrt(2 * Math.PI));
    const mean = part.lnThickness + slope * (index - part.index);
    const inside =
      region.also.length === 0
        ? within(region.thicknessNm[0], region.thicknessNm[1], mean, sl)
        : insideCut(cutAt(index, region, cuts), region, mean, sl);
    sum += rule.weights[i] * density * inside;
  }
  return 0.5 * (high - low) * sum;
}

/** Chance of a thickness between two, nm, when its logarithm is N(mean, sd). */
function within(low: number, high: number, mean: number, sd: number): number {
  if (!(high > low)) return 0;
  const below = low > 0 ? normalCdf((Math.log(low) - mean) / sd) : 0;
  return normalCdf((Math.log(high) - mean) / sd) - below;
}

/** The same where a cut allows it, averaged over the factors; six sd each way are looked at. */
function insideCut(cut: Cut, region: GoalRegion, mean: number, sd: number): number {
  const low = Math.max(region.thicknessNm[0], Math.exp(mean - 6 * sd));
  const high = Math.min(region.thicknessNm[1], Math.exp(mean + 6 * sd));
  if (!(high > low)) return 0;
  const factors = region.factors ?? asItIs;
  let inside = 0;
  for (let f = 0; f < factors.length; f++) {
    const { factor, weight } = factors[f];
    const ends = cut.allowed(low * factor, high * factor);
    for (let e = 0; e < ends.length; e += 2)
      inside += weight * within(ends[e] / factor, ends[e + 1] / factor, mean, sd);
  }
  return inside;
}

function cutAt(index: number, region: GoalRegion, cuts: Map<number, Cut>): Cut {
  let cut = cuts.get(index);
  if (!cut) {
    cut = new Cut(index, region.also);
    cuts.set(index, cut);
  }
  return cut;
}

/** Grid of a cut, nm: half of a film's usual spread, so that no stretch worth counting falls between two nodes. */
const gridNm = 0.5;
/** A condition with no value (infinite) counts as missed by this much, so that an edge can still be put next to it. */
const farOut = 1e6;

/**
 * The conditions at one index along a fixed grid of thickness, each asked once a node, and the edges between nodes where one
 * comes in or goes out. Each is followed apart: the worst of several has kinks where one takes over from another, and a
 * line across a kink is wrong by it.
 */
export class Cut {
  private readonly values: Float64Array[];
  private readonly edges = new Map<number, number>();

  constructor(
    private readonly index: number,
    private readonly also: GoalRegion["also"],
  ) {
    this.values = also.map(() => new Float64Array(0));
  }

  private at(condition: number, node: number): number {
    let values = this.values[condition];
    if (node >= values.length) {
      const longer = new Float64Array(2 * node + 16).fill(Number.NaN);
      longer.set(values);
      this.values[condition] = longer;
      values = longer;
    }
    const known = values[node];
    if (!Number.isNaN(known)) return known;
    const value = this.ask(condition, node * gridNm);
    values[node] = value;
    return value;
  }

  private isMet(node: number): boolean {
    for (let c = 0; c < this.also.length; c++) if (this.at(c, node) > 0) return false;
    return true;
  }

  /** Where between a node and the next the edge lies: where the last condition comes in, or the first goes out. */
  private edge(node: number, entering: boolean): number {
    const key = entering ? node : -node;
    const known = this.edges.get(key);
    if (known !== undefined) return known;
    let share = entering ? 0 : 1;
    for (let c = 0; c < this.also.length; c++) {
      if (this.at(c, entering ? node : node + 1) <= 0) continue;
      const root = this.root(c, node);
      if (entering ? root > share : root < share) share = root;
    }
    const edge = gridNm * (node + share);
    this.edges.set(key, edge);
    return edge;
  }

  /** Zero of a condition between a node and the next, as a share of the way: the line's, twice put right by asking there. */
  private root(condition: number, node: number): number {
    let low = 0;
    let atLow = this.at(condition, node);
    let high = 1;
    let atHigh = this.at(condition, node + 1);
    for (let round = 0; ; round++) {
      const share = low + ((high - low) * atLow) / (atLow - atHigh);
      if (round === 2) return share;
      const here = this.ask(condition, (node + share) * gridNm);
      if (here === 0) return share;
      if (here > 0 === atLow > 0) {
        low = share;
        atLow = here;
      } else {
        high = share;
        atHigh = here;
      }
    }
  }

  private ask(condition: number, thicknessNm: number): number {
    return Math.max(-farOut, Math.min(farOut, this.also[condition](this.index, thicknessNm)));
  }

  /** Stretches between two thicknesses where no condition is missed: start, end, start, end. */
  allowed(from: number, to: number): number[] {
    const out: number[] = [];
    let node = Math.floor(from / gridNm);
    let met = this.isMet(node);
    let start = met ? from : Number.NaN;
    for (; node * gridNm < to; node++) {
      const next = this.isMet(node + 1);
      if (next && !met) start = Math.max(from, this.edge(node, true));
      if (met && !next) {
        const end = Math.min(to, this.edge(node, false));
        if (end > start) out.push(start, end);
        start = Number.NaN;
      }
      met = next;
    }
    if (start < to) out.push(start, to);
    return out;
  }
}
