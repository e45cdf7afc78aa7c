/**
 * Reads `window:` (the qualified window, over and above each range) and `anchor:` (how far corrections may add up) of
 * line.yaml.
 */
import { type Dimension, nearestWord, parseLimit, parseQuantity, refuse } from "../../engine/index.ts";
import { type Expression, parseExpression, reach } from "./expression.ts";
import type { AnchorLimit, Setting, WindowLimit } from "./line.ts";
import type { Reader } from "./shape.ts";
import type { YamlPath } from "./yaml.ts";

/** Settings as far as they could be read; `failed` names must not be reported a second time. */
interface Known {
  settings: ReadonlyMap<string, Setting>;
  failed: ReadonlySet<string>;
}

/** The expression of a key over known settings, with the dimension of its value; undefined when reported or unknown. */
function readExpression(
  reader: Reader,
  path: YamlPath,
  { settings, failed }: Known,
): { expression: Expression; dimension: Dimension } | undefined {
  const expression = reader.attempt(path, () => parseExpression(String(path.at(-1))));
  if (!expression) return undefined;
  for (const name of expression.settings) {
    if (settings.has(name) || failed.has(name)) continue;
    const near = nearestWord(name, settings.keys());
    const hint = near ? `did you mean ${near}?` : `settings are ${[...settings.keys()].join(", ")}`;
    reader.add(path, "unknown-setting", `"${name}" is not a setting of this line`, hint, "key");
    return undefined;
  }
  const dimensions = new Set(expression.settings.map((name) => settings.get(name)?.dimension));
  if (dimensions.has(undefined)) return undefined;
  if (dimensions.size > 1) {
    const kinds = [...dimensions].join(" and ");
    reader.add(path, "mixed-dimensions", `"${expression.text}" mixes ${kinds}`, undefined, "key");
    return undefined;
  }
  const [dimension] = dimensions as Set<Dimension>;
  if (expression.kind !== "value" && dimension === "temperature") {
    reader.add(path, "mixed-dimensions", "temperatures have no natural zero to add or divide from", undefined, "key");
    return undefined;
  }
  return { expression, dimension: expression.kind === "ratio" ? "number" : dimension };
}

/** Limits in the order written. A limit that leaves nothing of the ranges is an error. */
export function readWindow(reader: Reader, known: Known): WindowLimit[] {
  const limits: WindowLimit[] = [];
  for (const [key, value] of reader.entries(["window"])) {
    const path = ["window", key];
    const read = readExpression(reader, path, known);
    if (typeof value !== "string") {
      reader.add(path, "wrong-type", `the limit of ${key} must be text`, "as in at most 1100 sccm, or 5..14");
      continue;
    }
    if (!read) continue;
    const { expression, dimension } = read;
    if (limits.some((limit) => limit.text === expression.text)) {
      reader.add(path, "duplicate-key", `"${expression.text}" is limited twice`, "write both sides as a..b", "key");
      continue;
    }
    const limit = reader.attempt(path, () => parseLimit(value, dimension));
    if (!limit) continue;
    const reached = reach(expression, known.settings);
    if (reached && (limit.low > reached.high || limit.high < reached.low)) {
      const shown = (number: number) => Number(number.toPrecision(4));
      const message = `within their ranges ${expression.text} runs from ${shown(reached.low)} to ${shown(reached.high)} (canonical units): this limit leaves nothing`;
      reader.add(path, "empty-window", message);
      continue;
    }
    limits.push({ ...expression, low: limit.low, high: limit.high });
  }
  return limits;
}

/** Anchor limits in the order written, as fractions. */
export function readAnchor(reader: Reader, known: Known): AnchorLimit[] {
  const limits: AnchorLimit[] = [];
  for (const [key, value] of reader.entries(["anchor"])) {
    const path = ["anchor", key];
    const read = readExpression(reader, path, known);
    if (typeof value !== "string") {
      reader.add(path, "wrong-type", `the anchor of ${key} must be text`, "as in 6 %");
      continue;
    }
    if (!read) continue;
    const { text, kind, settings } = read.expression;
    if (kind === "sum") {
      reader.add(path, "not-an-expression", "an anchor holds a setting or a ratio, not a sum", undefined, "key");
      continue;
    }
    const fraction = reader.attempt(path, () => {
      const percent = parseQuantity(value, "percent").value;
      if (!(percent > 0 && percent <= 100)) refuse("out-of-bounds", `${percent} % lies outside 0 to 100 %`);
      return percent / 100;
    });
    if (fraction !== undefined) limits.push({ text, kind, settings, fraction });
  }
  return limits;
}
