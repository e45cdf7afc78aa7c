/** What stages of all kinds share: chambers with a twin that cleans leave untouched, and logs to begin with. */
import type { Random } from "../../engine/index.ts";
import type { Film } from "./aim.ts";
import { need } from "./film-law.ts";
import { typedValue } from "./practices/dials.ts";
import type { Logged, Reading, StageChamber, StageLever } from "./stage.ts";
import type { ChamberSettings } from "./worlds.ts";

/** What a virtual chamber of either kind can do. */
interface Virtual {
  expected(settings: ChamberSettings): Film;
  clean(step?: { index: number; lnRate: number }): unknown;
  leak(index?: number): void;
  mend(): void;
  readonly depositionsSinceClean: number;
}

const NO_STEP = { index: 0, lnRate: 0 } as const;

/**
 * A chamber beside a twin made from the same seed, which lives through the same weather but whose cleans leave no step:
 * what is usual for the chamber. `written` says of each clean, by its number, whether it is written down.
 */
export function lockstep<V extends Virtual>(
  make: () => V,
  lay: (chamber: V, settings: ChamberSettings) => { film: Film; reading: Reading },
  { startsWithStep, written }: { startsWithStep: boolean; written?: (clean: number) => boolean },
): StageChamber {
  const chamber = make();
  const twin = make();
  // A new chamber may begin with a step. This clean takes the twin's weather out of step until the next one.
  if (startsWithStep) twin.clean({ ...NO_STEP });
  let cleans = 0;
  return {
    run(settings) {
      lay(twin, settings);
      const { film, reading } = lay(chamber, settings);
      const { index, thicknessNm } = reading;
      return { film, reading: { index, thicknessNm } };
    },
    clean() {
      const said = chamber.clean();
      twin.clean({ ...NO_STEP });
      const own = typeof said === "object" && said !== null && "written" in said ? said.written === true : true;
      return { written: own && (written?.(cleans++) ?? true) };
    },
    leak: () => {
      chamber.leak();
    },
    mend: () => chamber.mend(),
    expected: (settings) => chamber.expected(settings),
    usual: (settings) => twin.expected(settings),
    get sinceClean() {
      return chamber.depositionsSinceClean;
    },
  };
}

/** Runs of a sister's log. */
const SISTER_RUNS = 10;
/** Sd of the moves in a log's settings: real histories hold such moves. */
const MOVES = 0.02;

/** Silane, ammonia and time each moved at random by a few per cent about a recipe, typed in. */
export function scattered(
  about: ChamberSettings,
  levers: readonly StageLever[],
  source: Random,
  size = MOVES,
): ChamberSettings {
  const moved = new Map(about);
  for (const name of ["silane", "ammonia", "time"])
    moved.set(name, typedValue({ levers }, name, need(about, name) * Math.exp(size * source.normal())));
  return moved;
}

export function sisterLog(chamber: StageChamber, settings: () => ChamberSettings): Logged[] {
  return Array.from({ length: SISTER_RUNS }, (): Logged => {
    const at = settings();
    return { kind: "run", settings: at, reading: chamber.run(at).reading };
  });
}
