/** What a planned run is for, in words: from which levers it moves and how, and what it sharpens most, in numbers. */
import { type Belief, beliefRows, type ChamberModel, type Settings } from "../../calibration/index.ts";
import { shown } from "../line/settings.ts";
import { type PlanCandidate, type PlannedLever, moved as withMoves } from "./plan-candidates.ts";
import { meanFilm } from "./plan-region.ts";
import { asIndex, asNm, list } from "./reasons.ts";

const isTime = (l: PlannedLever) => l.setting.meaning === "time" || l.setting.meaning === "belt_speed";

/** "moves silane alone: tells gas ratio from total flow". `untaught`: levers no run of the line or earlier in the plan moves. */
export function purposeOf(
  { signs }: PlanCandidate,
  levers: readonly PlannedLever[],
  untaught: ReadonlySet<string>,
  again: boolean,
): string {
  const sign = (meaning: string) => {
    const i = levers.findIndex((l) => l.setting.meaning === meaning);
    return i < 0 ? 0 : signs[i];
  };
  const nameOf = (meaning: string) => levers.find((l) => l.setting.meaning === meaning)?.name ?? meaning;
  const movedLevers = levers.filter((_, i) => signs[i] !== 0);
  if (movedLevers.length === 0)
    return again
      ? "the recipe as it is, again: tells the chamber's level from the scatter of single runs"
      : "the recipe as it is: tells the chamber's level, which every other run is compared with";
  const [s, a] = [sign("silane"), sign("ammonia")];
  const words: string[] = [];
  if (s !== 0 && a === 0) words.push(`moves ${nameOf("silane")} alone of the gases: tells gas ratio from total flow`);
  else if (a !== 0 && s === 0)
    words.push(`moves ${nameOf("ammonia")} alone of the gases: tells the gas ratio at nearly the same rate`);
  else if (s !== 0 && s === a)
    words.push("moves both gases the same way: tells total flow at nearly the same gas ratio");
  else if (s !== 0)
    words.push("moves the gases against each other: tells the gas ratio, and whether the index bends with it");
  const others = movedLevers.filter((l) => !["silane", "ammonia"].includes(l.setting.meaning ?? ""));
  for (const lever of others.filter(isTime))
    words.push(`moves ${lever.name}: tells how much of it is lost before film grows, and steadies the rate`);
  const rest = others.filter((l) => !isTime(l));
  const names = list(rest.map((l) => l.name));
  const first = rest.some((l) => untaught.has(l.name)) ? ", never moved here before" : "";
  if (rest.length === 1) words.push(`moves ${names}${first}: tells its effect on index and thickness`);
  if (rest.length > 1) words.push(`moves ${names} together${first}: their effects come apart with the other runs`);
  return `${again ? "the same again: " : ""}${words.join("; ")}`;
}

/** An effect that a run sharpens: its standard deviation before and after, index or nm at the goal. */
export interface Sharpened {
  of: string;
  on: "index" | "thickness_nm";
  sdBefore: number;
  sdAfter: number;
}

/** Effects a person would ask after: each lever's move, the gas ratio at one total flow, the film itself. */
interface Contrast {
  of: string;
  on: Sharpened["on"];
  row: Float64Array;
  scale: number;
}

/** Effects of the moves from settings, as rows over the belief; thickness in nm at the film expected there. */
export function contrastsOf(
  model: ChamberModel,
  belief: Belief,
  at: Settings,
  levers: readonly PlannedLever[],
): Contrast[] {
  const base = beliefRows(model, at, belief.k);
  const nm = Math.exp(meanFilm(belief, base)[1]);
  const out: Contrast[] = [
    { of: "the film as it is", on: "index", row: base.index, scale: 1 },
    { of: "the film as it is", on: "thickness_nm", row: base.lnThickness, scale: nm },
  ];
  const add = (of: string, to: Settings) => {
    const there = beliefRows(model, to, belief.k);
    const index = there.index.map((v, i) => v - base.index[i]);
    const ln = there.lnThickness.map((v, i) => v - base.lnThickness[i]);
    if (index.some((v) => v !== 0)) out.push({ of, on: "index", row: index, scale: 1 });
    if (ln.some((v) => v !== 0)) out.push({ of, on: "thickness_nm", row: ln, scale: nm });
  };
  levers.forEach((lever, i) => {
    const to = withMoves(
      at,
      levers,
      levers.map((_, j) => (i === j ? 1 : 0)),
    );
    const by =
      lever.how === "log"
        ? `+${(100 * lever.step).toFixed(1)} % ${lever.name}`
        : `${lever.name} ${shown(lever.setting, at.get(lever.name) as number)} -> ${shown(lever.setting, to.get(lever.name) as number)}`;
    add(by, to);
  });
  return out;
}

/** What a run sharpened most: the largest fall of a standard deviation, as a share of it. Null when nothing falls by 3 %. */
export function mostSharpened(
  contrasts: readonly Contrast[],
  n: number,
  before: Float64Array,
  after: Float64Array,
): Sharpened | null {
  let best: Sharpened | null = null;
  let least = 0.97;
  for (const { of, on, row, scale } of contrasts) {
    const [sdBefore, sdAfter] = [before, after].map((p) => scale * Math.sqrt(Math.max(along(p, n, row), 0)));
    if (sdBefore > 0 && sdAfter / sdBefore < least) {
      least = sdAfter / sdBefore;
      best = { of, on, sdBefore, sdAfter };
    }
  }
  return best;
}

/** h' P h. */
export function along(p: Float64Array, n: number, row: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < n; i++) if (row[i] !== 0) for (let j = 0; j < n; j++) sum += row[i] * row[j] * p[i * n + j];
  return sum;
}

/** "sharpens +8.4 % silane on thickness from ±2.1 to ±0.9 nm" (95 %). */
export function sharpenedWords({ of, on, sdBefore, sdAfter }: Sharpened): string {
  const [a, b] = [1.96 * sdBefore, 1.96 * sdAfter];
  return on === "index"
    ? `sharpens what ${of} gives in index from ±${asIndex(a)} to ±${asIndex(b)}`
    : `sharpens what ${of} gives in thickness from ±${asNm(a)} to ±${asNm(b)} nm`;
}
