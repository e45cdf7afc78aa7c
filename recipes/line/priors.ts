/**
 * The part `priors:` of line.yaml: what a site knows better than calibration's standard priors (calibration/priors.ts, where
 * each stands with its reason). Names are those, in snake_case:
 *
 *   priors:
 *     index: { ratio: -0.20 sd 0.05, silane: { fleet: 0 sd 0.02, chambers: 0.01 } }
 *     rate: { silane: 0.75 sd 0.08, dead_time: 4 s sd 2 s }
 *     scatter: { process: { index: 0.004, thickness: 0.6 % }, step_at_clean: { rate: 2 % } }
 *
 * A prior is the fleet's mean and standard deviation; `chambers` is the standard deviation from chamber to chamber. "sd 0.02"
 * alone keeps the standard mean. An offset has no mean to state: it comes from the goal and the reference recipe.
 */
import { type Prior, type PriorOverrides, standardPriors } from "../../calibration/index.ts";
import { nearestWord, parseMeanSd, parseQuantity, refuse } from "../../engine/index.ts";
import type { Reader } from "./shape.ts";
import type { YamlPath, YamlValue } from "./yaml.ts";

type Part = "index" | "rate";
type ScatterName = keyof typeof standardPriors.scatter;

/** Priors of a part by the name written in the file; those no term of the model uses are not offered. */
const unused = new Set(["belt"]);
const snake = (name: string) => name.replace(/[A-Z]/g, (c) => `_${c.toLowerCase()}`);
const namesOf = (part: Part): Map<string, string> =>
  new Map(
    Object.keys(standardPriors[part])
      .filter((key) => !unused.has(key))
      .map((key) => [snake(key), key]),
  );

/** Scatters: the key in calibration, and what its second number is of. */
const scatters = new Map<string, { key: ScatterName; second: "thickness" | "rate" }>([
  ["process", { key: "process", second: "thickness" }],
  ["step_at_clean", { key: "step", second: "rate" }],
  ["walk", { key: "walk", second: "rate" }],
  ["service", { key: "service", second: "rate" }],
  ["bad_measurement", { key: "badMeasurement", second: "thickness" }],
]);

/** Beyond these a slip is likelier than knowledge: no coefficient of the model is near 10, no scatter near 0.3 or 50 %. */
const most = { coefficient: 10, seconds: 60, scatterIndex: 0.3, scatterPercent: 50 };

/** Reads `priors:`; undefined when the file states none. Every mistake is a problem of its own, with row and column. */
export function readPriors(reader: Reader): PriorOverrides | undefined {
  if (reader.at(["priors"]) === undefined) return undefined;
  const out: PriorOverrides = {};
  for (const [key] of reader.entries(["priors"])) {
    if (key === "index") out.index = readPart(reader, "index");
    else if (key === "rate") out.rate = readPart(reader, "rate");
    else if (key === "scatter") out.scatter = readScatter(reader);
    else misplaced(reader, ["priors", key]);
  }
  return out;
}

/** A key one level too high is the likeliest mistake: the parts that know it are named. */
function misplaced(reader: Reader, path: YamlPath): void {
  const key = String(path.at(-1));
  const homes = (["index", "rate"] as const).filter((part) => namesOf(part).has(key)) as string[];
  if (scatters.has(key)) homes.push("scatter");
  if (homes.length === 0) {
    reader.unknownKey(path, ["index", "rate", "scatter"]);
    return;
  }
  const hint = `write ${homes.map((home) => `${home}: { ${key}: ... }`).join(" or ")}`;
  reader.add(path, "unknown-key", `"${key}" must stand under ${homes.join(" or ")}`, hint, "key");
}

function readPart(reader: Reader, part: Part): Record<string, Partial<Prior>> {
  const out: Record<string, Partial<Prior>> = {};
  const names = namesOf(part);
  for (const [name, value] of reader.entries(["priors", part])) {
    const path = ["priors", part, name];
    const key = names.get(name);
    if (key === undefined) {
      unknown(reader, path, [...names.keys()], part);
      continue;
    }
    const prior = readPrior(reader, path, value);
    if (prior) out[key] = prior;
  }
  return out;
}

/** An unknown name, with the nearest; or the other part, where that one has it. */
function unknown(reader: Reader, path: YamlPath, known: readonly string[], part: Part): void {
  const name = String(path.at(-1));
  const other: Part = part === "index" ? "rate" : "index";
  if (nearestWord(name, known) === null && namesOf(other).has(name)) {
    reader.add(path, "unknown-key", `"${name}" belongs to the ${other} alone`, `write it under ${other}:`, "key");
  } else reader.unknownKey(path, known);
}

function readPrior(reader: Reader, path: YamlPath, value: YamlValue): Partial<Prior> | undefined {
  if (typeof value === "string") return reader.attempt(path, () => fleetLaw(String(path.at(-1)), value));
  if (typeof value !== "object" || value === null || Array.isArray(value)) {
    const hint = "as in -0.20 sd 0.05, or { fleet: -0.20 sd 0.05, chambers: 0.02 }";
    reader.add(path, "wrong-type", `${path.at(-1)} needs a mean with its standard deviation`, hint);
    return undefined;
  }
  const out: Partial<Prior> = {};
  for (const [key, text] of Object.entries(value)) {
    const at = [...path, key];
    if (key !== "fleet" && key !== "chambers") reader.unknownKey(at, ["fleet", "chambers"]);
    else if (typeof text !== "string") reader.add(at, "wrong-type", `${key} must be text or a number`);
    else if (key === "fleet")
      Object.assign(
        out,
        reader.attempt(at, () => fleetLaw(String(path.at(-1)), text)),
      );
    else {
      const spread = reader.attempt(at, () => spreadOf(String(path.at(-1)), text));
      if (spread !== undefined) out.spread = spread;
    }
  }
  if (Object.keys(value).length === 0) {
    const hint = "give fleet: MEAN sd SD, chambers: SD, or both";
    reader.add(path, "empty-prior", `nothing is stated of ${path.at(-1)}`, hint);
  }
  return out;
}

const unitOf = (name: string) =>
  name === "dead_time"
    ? ({ dimension: "time", options: { defaultUnit: "s" }, most: most.seconds } as const)
    : ({ dimension: "number", options: {}, most: most.coefficient } as const);

/** "-0.20 sd 0.05", or "sd 0.05" alone. */
function fleetLaw(name: string, text: string): Partial<Prior> {
  const { dimension, options, most: limit } = unitOf(name);
  const alone = /^\s*sd\b(.*)$/s.exec(text);
  if (alone) {
    const { value } = parseQuantity(alone[1], dimension, { ...options, difference: true });
    return { sd: positive(value, limit, text) };
  }
  const { mean, sd } = parseMeanSd(text, dimension, options);
  if (name === "offset")
    refuse("no-mean-here", `"${text}": an offset has no mean to state`, {
      hint: `its mean comes from the goal and the reference recipe; write sd ${sd}`,
    });
  if (Math.abs(mean) > limit) refuse("out-of-bounds", `"${text}": a mean of ${mean} is beyond ${limit}`);
  return { mean, sd: positive(sd, limit, text) };
}

function spreadOf(name: string, text: string): number {
  const { dimension, options, most: limit } = unitOf(name);
  const { value } = parseQuantity(text.replace(/^\s*sd\b/, ""), dimension, { ...options, difference: true });
  return positive(value, limit, text);
}

function positive(value: number, limit: number, text: string): number {
  if (value > 0 && value <= limit) return value;
  return refuse("out-of-bounds", `"${text}": a standard deviation must be above 0 and at most ${limit}`, {
    hint: "a small one says that it is known, not zero",
  });
}

function readScatter(reader: Reader): NonNullable<PriorOverrides["scatter"]> {
  const out: { -readonly [K in ScatterName]?: [number, number] } = {};
  for (const [name] of reader.entries(["priors", "scatter"])) {
    const path = ["priors", "scatter", name];
    const row = scatters.get(name);
    if (!row) {
      reader.unknownKey(path, [...scatters.keys()]);
      continue;
    }
    const pair: [number, number] = [...standardPriors.scatter[row.key]];
    const entries = reader.entries(path);
    for (const [key, text] of entries) {
      const at = [...path, key];
      if (key !== "index" && key !== row.second) reader.unknownKey(at, ["index", row.second]);
      else if (typeof text !== "string") reader.add(at, "wrong-type", `${key} must be text or a number`);
      else {
        const value = reader.attempt(at, () => (key === "index" ? scatterIndex(text) : scatterPercent(text)));
        if (value !== undefined) pair[key === "index" ? 0 : 1] = value;
      }
    }
    if (entries.length === 0) {
      const hint = `as in ${name}: { index: ${pair[0]}, ${row.second}: ${100 * pair[1]} % }`;
      reader.add(path, "empty-prior", `nothing is stated of ${name}`, hint);
    }
    out[row.key] = pair;
  }
  return out;
}

const scatterIndex = (text: string) =>
  positive(parseQuantity(text.replace(/^\s*sd\b/, ""), "number").value, most.scatterIndex, text);

/** Thickness and rate scatter in proportion, so in per cent; the model takes the logarithm. */
const scatterPercent = (text: string) =>
  positive(parseQuantity(text.replace(/^\s*sd\b/, ""), "percent").value, most.scatterPercent, text) / 100;

/** What the line states beside the standard, a sentence for `check`; empty when it states nothing. */
export function priorSentences(own: PriorOverrides | undefined): string[] {
  if (!own) return [];
  const said: string[] = [];
  const law = ({ mean, sd, spread }: Prior) => `${mean} sd ${sd}, chambers ${spread}`;
  for (const part of ["index", "rate"] as const)
    for (const [key, prior] of Object.entries(own[part] ?? {})) {
      const standard = (standardPriors[part] as Record<string, Prior>)[key];
      const now = law({ ...standard, ...prior });
      const name = `${part} ${snake(key).replaceAll("_", " ")}`;
      if (now !== law(standard)) said.push(`${name} ${now} (standard ${law(standard)})`);
    }
  for (const [name, { key, second }] of scatters) {
    const now = own.scatter?.[key];
    const standard = standardPriors.scatter[key];
    const words = ([n, r]: readonly number[]) => `${n} and ${Number((100 * r).toPrecision(4))} % of ${second}`;
    if (now && words(now) !== words(standard))
      said.push(`scatter of ${name.replaceAll("_", " ")} ${words(now)} (standard ${words(standard)})`);
  }
  return said.length === 0 ? [] : [`Priors of this line's own: ${said.join("; ")}.`];
}
