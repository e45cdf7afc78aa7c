/**
 * A quick yes for the commonest entry. Books hold thousands of runs and the general schema costs most of the time of
 * opening one; this says yes to a run of the ordinary shape and "perhaps" to everything else, which then goes through the
 * schema. It must never say yes where the schema says no: a test holds the two together.
 */

const isText = (v: unknown, least: number, most: number): boolean =>
  typeof v === "string" && v.length >= least && v.length <= most;
const isNumber = (v: unknown, low: number, high: number): boolean => typeof v === "number" && v >= low && v <= high;
const isCount = (v: unknown, least: number): boolean => Number.isInteger(v) && isNumber(v, least, 1_000_000_000);
const isObject = (v: unknown): v is Record<string, unknown> => typeof v === "object" && v !== null && !Array.isArray(v);

const runMembers: Record<string, (v: unknown) => boolean> = {
  chamber: (v) => isText(v, 1, 200),
  recipe: (v) => isText(v, 1, 200),
  settings_from: (v) => isText(v, 1, 200),
  steps: (v) => Array.isArray(v) && v.length === 1 && plainStep(v[0]),
  count: (v) => isCount(v, 1),
  since_clean: (v) => isCount(v, 0),
  kind: (v) => v === "tuning" || v === "production",
  boat: (v) => isText(v, 0, 4000),
  position: (v) => isText(v, 0, 4000),
  readings: (v) => Array.isArray(v) && v.length <= 100 && v.every(plainReading),
  note: (v) => isText(v, 0, 4000),
  imported_from: (v) =>
    isObject(v) && Object.keys(v).length === 2 && isText(v["file"], 0, 4000) && isCount(v["row"], 0),
};
const needed = ["chamber", "recipe", "settings_from", "steps", "count", "readings"];

const readingMembers: Record<string, (v: unknown) => boolean> = {
  gauge: (v) => isText(v, 1, 200),
  on: (v) => v === "polished" || v === "cell",
  index: (v) => isNumber(v, 0, 100),
  thickness_nm: (v) => isNumber(v, 0, 1_000_000),
  weighted_reflectance_percent: (v) => isNumber(v, 0, 100),
  reflectance_minimum_nm: (v) => isNumber(v, 0, 1_000_000),
};

function has(members: Record<string, (v: unknown) => boolean>, value: Record<string, unknown>): boolean {
  for (const key of Object.keys(value)) if (!Object.hasOwn(members, key) || !members[key](value[key])) return false;
  return true;
}

function plainReading(v: unknown): boolean {
  return isObject(v) && v["gauge"] !== undefined && v["on"] !== undefined && has(readingMembers, v);
}

function plainStep(v: unknown): boolean {
  if (!isObject(v) || Object.keys(v).length !== 1 || !isObject(v["settings"])) return false;
  for (const [name, quantity] of Object.entries(v["settings"])) {
    if (!isText(name, 1, 200) || !isObject(quantity) || Object.keys(quantity).length !== 2) return false;
    if (!Number.isFinite(quantity["value"]) || !isText(quantity["unit"], 0, 40)) return false;
  }
  return true;
}

/** True: certainly a valid run. False: ask the schema. */
export function isPlainRun(data: unknown): boolean {
  return isObject(data) && needed.every((key) => data[key] !== undefined) && has(runMembers, data);
}
