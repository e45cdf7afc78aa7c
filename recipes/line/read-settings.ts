/**
 * Reads `settings:` and `chambers:` of line.yaml: ranges, smallest steps, usable floors, meanings, and the narrowing a
 * chamber may do. A chamber never widens what the line qualified.
 */
import * as z from "zod/mini";
import {
  type Dimension,
  dimensionOf,
  formatQuantity,
  fromCanonicalStep,
  nearestWord,
  parseQuantity,
  parseRange,
  toCanonical,
  withoutDust,
} from "../../engine/index.ts";
import { within } from "./goal-shape.ts";
import type { Chamber, Setting } from "./line.ts";
import { MEANINGS, meaningDimension } from "./meanings.ts";
import { sameButCapitals, settingNameProblem } from "./names.ts";
import { typeable } from "./settings.ts";
import type { Reader } from "./shape.ts";
import type { YamlPath } from "./yaml.ts";

/** Below this share of a controller's full scale flows are not trusted. Common practice (2 to 5 %), no source. */
export const USABLE_FLOOR = 0.02;

const narrowingKeys = {
  range: z.optional(z.string()),
  smallest: z.optional(z.string()),
  full_scale: z.optional(z.string()),
  tune: z.optional(z.boolean()),
};
const settingShape = z.strictObject({
  ...narrowingKeys,
  range: z.string(),
  acts: z.optional(z.enum(["log", "linear"])),
  acts_as: z.optional(z.string()),
  power_is: z.optional(z.enum(["peak", "average"])),
});
const narrowingShape = z.strictObject(narrowingKeys);

/** A setting as declared, before the usable floor is applied. */
export interface Declared {
  setting: Setting;
  /** Lower end of the declared range, which a controller's usable floor may lie above. */
  declaredLow: number;
}

interface Numbers {
  dimension: Dimension;
  unit: string;
  low: number;
  high: number;
  smallest: number | null;
  fullScale: number | null;
}

/** All settings that could be read, by name; `failed` holds names of those that could not. */
export function readSettings(reader: Reader): { declared: Map<string, Declared>; failed: Set<string> } {
  const declared = new Map<string, Declared>();
  const failed = new Set<string>();
  const entries = reader.entries(["settings"]);
  if (entries.length === 0) {
    reader.add(["settings"], "missing-key", '"settings" must hold at least one setting', "as in the demo line");
  }
  const names = entries.map(([name]) => name);
  for (const { name, earlier } of sameButCapitals(names)) {
    reader.add(
      ["settings", name],
      "name-clash",
      `"${earlier}" and "${name}" differ only in capitals`,
      undefined,
      "key",
    );
  }
  for (const [name] of entries) {
    const path = ["settings", name];
    const bad = settingNameProblem(name);
    if (bad) reader.add(path, "bad-name", bad.message, bad.hint, "key");
    const setting = bad ? undefined : readSetting(reader, path, name);
    if (setting) declared.set(name, setting);
    else failed.add(name);
  }
  checkMeanings(reader, declared, failed);
  return { declared, failed };
}

function readSetting(reader: Reader, path: YamlPath, name: string): Declared | undefined {
  const shape = reader.shaped(settingShape, path);
  if (!shape) {
    quantitiesAlone(reader, path, meaningDimension(name));
    return undefined;
  }
  const before = reader.problems.length;
  const meaning = readMeaning(reader, path, name, shape);
  const dimension = meaning === null ? null : meaningDimension(meaning);
  const range = reader.attempt([...path, "range"], () => parseRange(shape.range, dimension));
  if (!range) return undefined;
  const kind = dimension ?? dimensionOf(range.unit);
  refuseBelowZero(reader, [...path, "range"], kind, range.low, shape.acts === "log" || NEVER_ZERO.has(meaning ?? ""));
  const numbers = readNumbers(reader, path, shape, { dimension: kind, ...range, smallest: null, fullScale: null });
  if (!numbers || reader.problems.length > before) return undefined;
  const { low, high, unit, fullScale } = numbers;
  const tune = shape.tune ?? false;
  if (tune && numbers.smallest === null) {
    const hint = `the smallest step that can be typed in, as in smallest: 1${unit === "" ? "" : ` ${unit}`}`;
    reader.add(path, "missing-key", `"smallest" is missing, and ${name} is to be tuned`, hint, "key");
    return undefined;
  }
  const setting: Setting = {
    name,
    dimension: kind,
    unit,
    low: withFloor(low, fullScale, kind),
    high,
    smallest: numbers.smallest ?? fineStep(high - low),
    fullScale,
    tune,
    meaning,
    acts: shape.acts ?? null,
    ...(shape.power_is ? { powerIs: shape.power_is } : {}),
  };
  return refuseNoStep(reader, path, setting) ? undefined : { setting, declaredLow: low };
}

/** Reports a range in which no value can be typed in: narrower than the step once narrowed or raised to the floor. */
function refuseNoStep(reader: Reader, path: YamlPath, setting: Setting): boolean {
  if (typeable(setting)) return false;
  const step = formatQuantity(fromStep(setting), setting.unit);
  const message = `no value that can be typed in, a multiple of ${step}, lies inside the range of ${setting.name}`;
  reader.add(path, "no-step-in-range", message, "widen the range, or check smallest", "key");
  return true;
}

/** The step as a point of the setting's scale, so that it is shown as "1 K" and not as -272.15 degrees. */
function fromStep({ smallest, unit }: Setting): number {
  return toCanonical(fromCanonicalStep(smallest, unit), unit);
}

/** Judges the quantities of a setting whose keys are wrong, so that one pass finds both. */
function quantitiesAlone(reader: Reader, path: YamlPath, dimension: Dimension | null): void {
  for (const key of ["range", "smallest", "full_scale"]) {
    const text = reader.at([...path, key]);
    if (typeof text !== "string") continue;
    const parse = key === "range" ? parseRange : parseQuantity;
    reader.attempt([...path, key], () => parse(text, dimension));
  }
}

/** Meanings whose logarithm the model takes: a range that reaches zero has none there. */
const NEVER_ZERO = new Set(["silane", "ammonia", "time", "belt_speed", "power", "pressure"]);

function refuseBelowZero(reader: Reader, path: YamlPath, dimension: Dimension, low: number, neverZero: boolean): void {
  if (dimension === "temperature" || dimension === "number" || low > 0 || (low === 0 && !neverZero)) return;
  const message = low < 0 ? `a ${dimension} cannot be negative` : "the range must begin above zero";
  reader.add(path, "zero-range", message, "begin at the lowest value that is qualified");
}

/** A step for settings that are never tuned and declare none: a decimal thousandth of the range, or finer. */
function fineStep(span: number): number {
  return withoutDust(10 ** (Math.floor(Math.log10(span)) - 3));
}

function withFloor(low: number, fullScale: number | null, dimension: Dimension): number {
  // a floor is a share of a flow (or pressure, power): a temperature has no natural zero
  return fullScale === null || dimension === "temperature" ? low : Math.max(low, withoutDust(USABLE_FLOOR * fullScale));
}

function readMeaning(
  reader: Reader,
  path: YamlPath,
  name: string,
  shape: { acts?: string; acts_as?: string; power_is?: string },
): string | null {
  const builtIn = meaningDimension(name) === null ? null : name;
  const meaning = shape.acts_as ?? builtIn;
  if (shape.acts_as !== undefined && meaningDimension(shape.acts_as) === null) {
    const near = nearestWord(shape.acts_as, MEANINGS.keys());
    const hint = near ? `did you mean ${near}?` : `known are ${[...MEANINGS.keys()].join(", ")}, zone_1, zone_2, ...`;
    reader.add([...path, "acts_as"], "unknown-meaning", `"${shape.acts_as}" has no built-in meaning`, hint);
  } else if (shape.acts_as !== undefined && builtIn !== null && shape.acts_as !== name) {
    reader.add([...path, "acts_as"], "two-meanings", `${name} already has a meaning of its own`, "choose another name");
  } else if (meaning !== null && shape.acts !== undefined) {
    const hint = "leave acts out; it is for settings without a built-in meaning";
    reader.add([...path, "acts"], "two-meanings", `how ${meaning} acts is already known`, hint);
  } else if (meaning === null && shape.acts === undefined) {
    const near = nearestWord(name, MEANINGS.keys());
    const others = "add acts: log or acts: linear, or acts_as: silane (or another built-in name)";
    reader.add(
      path,
      "unknown-meaning",
      `"${name}" has no built-in meaning, and it is not said how it acts`,
      near ? `did you mean ${near}? Otherwise ${others}` : others,
      "key",
    );
  }
  if (shape.power_is !== undefined && meaning !== "power") {
    reader.add([...path, "power_is"], "two-meanings", `power_is belongs to the power, not to ${name}`);
  }
  return meaning;
}

/** Reads smallest and full_scale, and range again where a chamber gives one, over what is known so far. */
function readNumbers(
  reader: Reader,
  path: YamlPath,
  shape: { smallest?: string; full_scale?: string },
  known: Numbers,
): Numbers | undefined {
  const { dimension, low, high, unit } = known;
  const numbers = { ...known };
  const { smallest, full_scale: fullScaleText } = shape;
  if (smallest !== undefined) {
    const step = reader.attempt([...path, "smallest"], () => {
      const { value } = parseQuantity(smallest, dimension, { difference: true });
      const span = high - low;
      const hint = `above zero and below the width of the range, ${formatQuantity(span, dimension === "temperature" ? "degC" : unit)}`;
      return within(value, Number.MIN_VALUE, span, "", hint);
    });
    if (step === undefined) return undefined;
    numbers.smallest = step;
  }
  if (fullScaleText !== undefined) {
    const fullScale = reader.attempt([...path, "full_scale"], () => parseQuantity(fullScaleText, dimension).value);
    if (fullScale === undefined) return undefined;
    numbers.fullScale = fullScale;
    const shown = (value: number) => formatQuantity(value, unit);
    if (fullScale < high) {
      const message = `the range goes up to ${shown(high)}, beyond the full scale of ${shown(fullScale)}`;
      reader.add([...path, "full_scale"], "beyond-full-scale", message);
      return undefined;
    }
    const floor = withFloor(low, fullScale, dimension);
    if (floor >= high) {
      const message = `the whole range lies below the usable floor of ${shown(floor)}, 2 % of full scale`;
      reader.add([...path, "full_scale"], "below-floor", message);
      return undefined;
    }
  }
  return numbers;
}

function checkMeanings(reader: Reader, declared: ReadonlyMap<string, Declared>, failed: ReadonlySet<string>): void {
  const byMeaning = new Map<string, string>();
  for (const { setting } of declared.values()) {
    if (setting.meaning === null) continue;
    const other = byMeaning.get(setting.meaning);
    if (other !== undefined) {
      const message = `${other} and ${setting.name} both act as ${setting.meaning}`;
      reader.add(["settings", setting.name], "two-meanings", message, undefined, "key");
    }
    byMeaning.set(setting.meaning, setting.name);
  }
  const time = byMeaning.get("time");
  const speed = byMeaning.get("belt_speed");
  if (time !== undefined && speed !== undefined) {
    const message = `${speed} stands in place of ${time}; a line has one of them`;
    reader.add(["settings", speed], "time-and-speed", message, "leave one of the two out", "key");
  }
  if (time === undefined && speed === undefined && failed.size === 0 && declared.size > 0) {
    const message = "no setting says how long the film grows";
    reader.add(["settings"], "no-time", message, "declare time, or belt_speed on a moving belt", "key");
  }
}

/** Chambers with their narrowed settings, in the order declared. */
export function readChambers(
  reader: Reader,
  declared: ReadonlyMap<string, Declared>,
  failed: ReadonlySet<string>,
): Map<string, Chamber> {
  const chambers = new Map<string, Chamber>();
  if (reader.entries(["chambers"]).length === 0) {
    reader.add(["chambers"], "missing-key", '"chambers" must hold at least one chamber', "as in A1: {}");
  }
  for (const [name] of reader.named(["chambers"], "chamber")) {
    const settings = new Map([...declared].map(([key, { setting }]) => [key, setting]));
    for (const [key] of reader.entries(["chambers", name])) {
      if (key !== "settings") reader.unknownKey(["chambers", name, key], ["settings"]);
    }
    for (const [key] of reader.entries(["chambers", name, "settings"])) {
      const path = ["chambers", name, "settings", key];
      const base = declared.get(key);
      if (base) {
        const narrowed = narrow(reader, path, base);
        if (narrowed) settings.set(key, narrowed);
      } else if (!failed.has(key)) {
        reader.unknownKey(path, [...declared.keys(), ...failed]);
      }
    }
    chambers.set(name, { name, settings });
  }
  return chambers;
}

function narrow(reader: Reader, path: YamlPath, { setting, declaredLow }: Declared): Setting | undefined {
  const shape = reader.shaped(narrowingShape, path);
  if (!shape) return undefined;
  const { range: rangeText } = shape;
  let range = { low: declaredLow, high: setting.high, unit: setting.unit };
  if (rangeText !== undefined) {
    const read = reader.attempt([...path, "range"], () => parseRange(rangeText, setting.dimension));
    if (!read) return undefined;
    range = read;
    if (range.low < declaredLow || range.high > setting.high) {
      const line = `${formatQuantity(declaredLow, setting.unit)} to ${formatQuantity(setting.high, setting.unit)}`;
      const message = `${rangeText} goes beyond the line's range of ${line}; a chamber may narrow, never widen`;
      reader.add([...path, "range"], "widened", message, "widen the line's own range if the line is qualified for it");
      return undefined;
    }
  }
  if (shape.tune === true && !setting.tune) {
    const message = `the line does not tune ${setting.name}; a chamber may narrow, never widen`;
    reader.add([...path, "tune"], "widened", message);
    return undefined;
  }
  const numbers = readNumbers(reader, path, shape, {
    ...range,
    dimension: setting.dimension,
    smallest: setting.smallest,
    fullScale: setting.fullScale,
  });
  if (!numbers) return undefined;
  const low = withFloor(range.low, numbers.fullScale, setting.dimension);
  if (low >= range.high) {
    const message = `nothing is left of ${setting.name} above the usable floor, 2 % of full scale`;
    reader.add(path, "below-floor", message, undefined, "key");
    return undefined;
  }
  const { smallest, fullScale } = numbers;
  const narrowed = {
    ...setting,
    low,
    high: range.high,
    smallest: smallest ?? setting.smallest,
    fullScale,
    tune: shape.tune ?? setting.tune,
  };
  return refuseNoStep(reader, path, narrowed) ? undefined : narrowed;
}
