/** What an entry would hold, in words, for --dry-run: a sentence with what and where, then a line a field. */

/** An entry to be written, as far as the words need it. */
interface Draft {
  kind: string;
  at?: string;
  by?: string;
  data: object;
}

/** Fields that are named in the sentence, or are there to be counted by a program. */
const said = new Set(["chamber", "entry", "imported_from", "site_values", "reference"]);

/** A field's name and value as people say them: "thickness_nm" 84 is "thickness 84 nm". */
function field(name: string, value: unknown): string {
  const unit = /_(nm|percent)$/.exec(name)?.[1];
  const plain = (unit ? name.slice(0, -unit.length - 1) : name).replaceAll("_", " ");
  return `${plain} ${words(value)}${unit === "nm" ? " nm" : unit ? " %" : ""}`;
}

function words(value: unknown): string {
  if (value === null) return "taken away";
  if (Array.isArray(value)) return value.map(words).join("; ");
  if (typeof value !== "object") return String(value);
  if ("value" in value && "unit" in value) return `${value.value} ${value.unit}`.trim();
  return Object.entries(value)
    .filter(([name]) => !said.has(name))
    .map(([name, one]) => field(name, one))
    .join(", ");
}

/** Steps of a recipe: the settings alone where there is one layer, else by the layer's name. */
function stepWords(steps: readonly { name?: string; settings: object }[]): string {
  return steps.map(({ name, settings }) => `${name === undefined ? "" : `${name}: `}${words(settings)}`).join("; ");
}

/** "would record a run of A2 at 2026-03-11T22:40:00.000Z, by Ana:" and its fields. */
export function draftWords({ kind, at, by, data }: Draft): string[] {
  const { chamber, entry } = data as { chamber?: string; entry?: number };
  const what =
    kind === "correct"
      ? `correct entry ${entry}`
      : kind === "gauge"
        ? "record a reading of a reference wafer"
        : `record a ${kind}${chamber === undefined ? "" : ` ${kind === "run" ? "of" : "on"} ${chamber}`}`;
  const lines = Object.entries(data).flatMap(([name, value]) => {
    if (said.has(name)) return [];
    if (name === "steps") return [`  settings: ${stepWords(value)}`];
    const text = words(value);
    return text === "" ? [] : [`  ${name.replaceAll("_", " ")}: ${text}`];
  });
  const readings = "readings" in data && Array.isArray(data.readings) && data.readings.length === 0;
  const stamp = `${at === undefined ? "" : ` at ${at}`}${by === undefined ? "" : `, by ${by}`}`;
  return [`would ${what}${stamp}:`, ...lines, ...(readings ? ["  nothing measured"] : [])];
}
