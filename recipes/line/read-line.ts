/**
 * From the bytes of line.yaml to a `Line`, or a Refusal that holds every problem found, each with row and column. Reads
 * no file itself: an efficiency table named by `weight:` comes through a passed-in reader.
 */
import { createHash } from "node:crypto";
import type * as z from "zod/mini";
import { type Problem, Refusal } from "../../engine/index.ts";
import { readWeight } from "./efficiency.ts";
import { gaugeShape, goalShape, lightShape, oneRow, peopleShape, timeZone, waferShape } from "./goal-shape.ts";
import { type CoatedLight, impliedBy } from "./implications.ts";
import type { Gauge, Goal, Light, Line, Wafer } from "./line.ts";
import type { FileReader } from "./number-table.ts";
import { readPriors } from "./priors.ts";
import { readChambers, readSettings } from "./read-settings.ts";
import { readAnchor, readWindow } from "./read-window.ts";
import { Reader } from "./shape.ts";
import { readYaml } from "./yaml.ts";

/** Facet angle of a crystallographic {111} pyramid on (100) silicon, atan(sqrt 2), degrees. */
export const FACET_ANGLE_DEG = 54.74;
const DEFAULT_LIGHT = { fromNm: 300, toNm: 1100 };
const KEYS = [
  "line",
  "time_zone",
  "wafer",
  "goal",
  "light",
  "gauges",
  "settings",
  "window",
  "anchor",
  "recipes",
  "people",
  "chambers",
  "priors",
];

export interface LineDoors {
  /** Reads a file named in line.yaml, by the name written there. */
  readFile?: FileReader;
  /** Optics of the declared wafer, for the implications that need them; left out, those are left out. */
  light?: CoatedLight;
}

/**
 * Reads a line file. `source` is the file's bytes (or its text, hashed as UTF-8), `file` its name for messages.
 * Throws a Refusal with all problems, in file order.
 */
export function readLine(source: Uint8Array | string, file: string, doors: LineDoors = {}): Line {
  const reader = new Reader(readYaml(source, file));
  const { root } = reader.yaml;
  if (typeof root !== "object" || root === null || Array.isArray(root)) {
    reader.add([], "wrong-type", "a line file holds keys and values", "as in line: Saltmarsh 2");
    throw new Refusal(reader.problems);
  }
  for (const key of Object.keys(root)) if (!KEYS.includes(key)) reader.unknownKey([key], KEYS);

  const name = reader.shaped(oneRow, ["line"]);
  const zone = reader.shaped(timeZone, ["time_zone"]);
  const wafer = readWafer(reader);
  const goal = readGoal(reader, ["goal"]);
  const light = readLight(reader, doors.readFile);
  if (light && goal) minimumInLight(reader, goal, light, ["goal"]);
  const gauges = readGauges(reader);
  const { declared, failed } = readSettings(reader);
  const settings = new Map([...declared].map(([key, { setting }]) => [key, setting]));
  const window = readWindow(reader, { settings, failed });
  const anchor = readAnchor(reader, { settings, failed });
  const recipes = readRecipes(reader);
  for (const [key, recipe] of recipes) if (light) minimumInLight(reader, recipe.goal, light, ["recipes", key, "goal"]);
  const people = readPeople(reader);
  const chambers = readChambers(reader, declared, failed);
  const priors = readPriors(reader);
  if (reader.problems.length > 0) throw new Refusal(inFileOrder(reader.problems));
  if (name === undefined || zone === undefined || !wafer || !goal || !light || !people) {
    throw new Error("a part of the line file was not read, and no reason was given");
  }
  const hash = createHash("sha256").update(source).digest("hex");
  const line = {
    name,
    timeZone: zone,
    wafer,
    goal,
    light,
    gauges,
    settings,
    window,
    anchor,
    recipes,
    people,
    chambers,
    ...(priors && { priors }),
  };
  const complete: Line = { ...line, hash, implications: [] };
  return { ...complete, implications: impliedBy(complete, [...declared.values()], doors.light) };
}

function inFileOrder(problems: Problem[]): Problem[] {
  const place = ({ row = 0, column = 0 }: Problem) => row * 1e6 + column;
  return [...problems].sort((a, b) => place(a) - place(b));
}

function readWafer(reader: Reader): Wafer | undefined {
  const shape = reader.shaped(waferShape, ["wafer"]);
  if (!shape) return undefined;
  const seenFrom = shape.seen_from ?? "air";
  if (shape.surface === "polished") {
    for (const key of ["facet_angle", "facet_factor"] as const) {
      if (shape[key] === undefined) continue;
      const hint = "leave it out, or declare surface: pyramids";
      reader.add(["wafer", key], "pyramids-only", `${key} belongs to pyramids; this wafer is polished`, hint, "key");
    }
    return { surface: "polished", facetAngleDeg: 0, facetFactor: { mean: 1, sd: 0 }, seenFrom };
  }
  if (!shape.facet_factor) {
    const hint =
      "film on a facet over film on a polished witness, as in facet_factor: 0.8 sd 0.1 when nobody measured it";
    reader.add(["wafer"], "missing-key", '"facet_factor" is missing, and the wafer has pyramids', hint, "key");
    return undefined;
  }
  return {
    surface: "pyramids",
    facetAngleDeg: shape.facet_angle ?? FACET_ANGLE_DEG,
    facetFactor: shape.facet_factor,
    seenFrom,
  };
}

function readGoal(reader: Reader, path: readonly string[]): Goal | undefined {
  const shape = reader.shaped(goalShape, path);
  if (!shape) return undefined;
  const { index, thickness, weighted_reflectance, reflectance_minimum } = shape;
  if (!index && !thickness && !weighted_reflectance && !reflectance_minimum) {
    const hint = `at least one of ${Object.keys(goalShape.shape).join(", ")}`;
    reader.add(path, "no-goal", "the goal is empty", hint);
    return undefined;
  }
  return {
    ...(index && { index }),
    ...(thickness && { thicknessNm: thickness }),
    ...(weighted_reflectance && { weightedReflectancePercent: weighted_reflectance }),
    ...(reflectance_minimum && { reflectanceMinimumNm: reflectance_minimum }),
  };
}

/** A minimum outside the light range is never found there, so a goal for it could never be judged. */
function minimumInLight(reader: Reader, goal: Goal, { fromNm, toNm }: Light, path: readonly string[]): void {
  const minimum = goal.reflectanceMinimumNm;
  if (!minimum || (minimum.value - minimum.within > fromNm && minimum.value + minimum.within < toNm)) return;
  const message = `${minimum.value} nm within ${minimum.within} nm leaves the light, ${fromNm} to ${toNm} nm`;
  reader.add([...path, "reflectance_minimum"], "minimum-outside-light", message, "widen the light, or move the goal");
}

function readLight(reader: Reader, readFile: FileReader | undefined): Light | undefined {
  if (reader.at(["light"]) === undefined) return { ...DEFAULT_LIGHT, weight: "photons" };
  const shape = reader.shaped(lightShape, ["light"]);
  if (!shape) return undefined;
  const { from: fromNm = DEFAULT_LIGHT.fromNm, to: toNm = DEFAULT_LIGHT.toNm, weight = "photons" } = shape;
  if (fromNm >= toNm) {
    const message = `the light goes from ${fromNm} nm to ${toNm} nm, which does not rise`;
    reader.add(["light"], "range-reversed", message);
    return undefined;
  }
  const counted = readWeight(reader, weight, { fromNm, toNm }, readFile);
  return counted && { fromNm, toNm, weight: counted };
}

function readGauges(reader: Reader): Map<string, Gauge> {
  const gauges = new Map<string, Gauge>();
  if (reader.entries(["gauges"]).length === 0) {
    const hint = "as in ellipsometer: { on: polished, index: 0.003, thickness: 0.4 nm }";
    reader.add(["gauges"], "missing-key", '"gauges" must hold at least one gauge', hint);
  }
  for (const [name] of reader.named(["gauges"], "gauge")) {
    const path = ["gauges", name];
    const shape = reader.shaped(gaugeShape, path);
    if (!shape) continue;
    const { index, thickness, weighted_reflectance, reflectance_minimum, day_to_day: daily } = shape;
    gaugeReference(reader, path, shape);
    if (index === undefined && thickness === undefined && !weighted_reflectance && !reflectance_minimum) {
      const hint = "give the repeatability of index, thickness, weighted_reflectance or reflectance_minimum";
      reader.add(path, "gauge-reads-nothing", `the gauge ${name} reads nothing`, hint, "key");
      continue;
    }
    gauges.set(name, {
      name,
      on: shape.on,
      ...(index !== undefined && { index }),
      ...(thickness !== undefined && { thicknessNm: thickness }),
      ...(weighted_reflectance !== undefined && { weightedReflectancePercent: weighted_reflectance }),
      ...(reflectance_minimum !== undefined && { reflectanceMinimumNm: reflectance_minimum }),
      dayToDay: { index: daily?.index ?? 0, thicknessNm: daily?.thickness ?? 0 },
      ...(shape.correlation !== undefined && { correlation: shape.correlation }),
      ...(shape.reference && {
        reference: {
          ...(shape.reference.index && { index: shape.reference.index }),
          ...(shape.reference.thickness && { thicknessNm: shape.reference.thickness }),
        },
      }),
    });
  }
  return gauges;
}

/** A reference wafer and a correlation are of film, and so of a gauge that reads film. */
function gaugeReference(reader: Reader, path: readonly string[], shape: z.output<typeof gaugeShape>): void {
  const { reference, correlation } = shape;
  for (const key of ["index", "thickness"] as const) {
    if (reference?.[key] === undefined || shape[key] !== undefined) continue;
    const hint = `give its repeatability too, as ${key}, or leave it out of the reference`;
    reader.add([...path, "reference", key], "gauge-reads-nothing", `${path.at(-1)} does not read ${key}`, hint, "key");
  }
  if (reference && !reference.index && !reference.thickness) {
    const hint =
      "as in reference: { index: 2.045, thickness: 85.0 nm }; without it the first readings are the reference";
    reader.add([...path, "reference"], "empty-reference", "the reference wafer has no value", hint, "key");
  }
  if (correlation !== undefined && (shape.index === undefined || shape.thickness === undefined)) {
    const hint = "it is that of errors in index and thickness, and the gauge does not read both";
    reader.add([...path, "correlation"], "nothing-to-correlate", "correlation has no meaning here", hint, "key");
  }
}

function readRecipes(reader: Reader): Map<string, { goal: Goal }> {
  const recipes = new Map<string, { goal: Goal }>();
  for (const [name] of reader.named(["recipes"], "recipe")) {
    const path = ["recipes", name];
    for (const [key] of reader.entries(path)) if (key !== "goal") reader.unknownKey([...path, key], ["goal"]);
    if (reader.at([...path, "goal"]) === undefined) {
      reader.add(
        path,
        "missing-key",
        `the recipe ${name} has no goal of its own`,
        "give a goal, or leave it out",
        "key",
      );
      continue;
    }
    const goal = readGoal(reader, [...path, "goal"]);
    if (goal) recipes.set(name, { goal });
  }
  return recipes;
}

function readPeople(reader: Reader): Line["people"] | undefined {
  if (reader.at(["people"]) === undefined) return { approve: [], override: [] };
  const shape = reader.shaped(peopleShape, ["people"]);
  return shape && { approve: shape.approve ?? [], override: shape.override ?? [] };
}
