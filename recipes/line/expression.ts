/**
 * Expressions over settings that a window or an anchor may limit: a name, a ratio a/b, a sum a+b(+c). Nothing more, so
 * that every limit can be said in one sentence.
 */
import { refuse } from "../../engine/index.ts";

export interface Expression {
  /** As written, without spaces: "ammonia/silane". */
  text: string;
  kind: "value" | "ratio" | "sum";
  settings: readonly string[];
}

/** Reads an expression. Throws `not-an-expression`. */
export function parseExpression(written: string): Expression {
  const text = written.replace(/\s+/g, "");
  const hint = "write a setting, a ratio as in ammonia/silane, or a sum as in silane+ammonia";
  const ratio = text.split("/");
  const sum = text.split("+");
  const kind = ratio.length > 1 ? "ratio" : sum.length > 1 ? "sum" : "value";
  const settings = kind === "ratio" ? ratio : sum;
  const wellFormed = settings.every((name) => /^[A-Za-z]\w*$/.test(name));
  if (!wellFormed || (kind === "ratio" && settings.length !== 2)) {
    refuse("not-an-expression", `"${written}" is not a setting, ratio or sum`, { hint });
  }
  if (new Set(settings).size !== settings.length) {
    refuse("not-an-expression", `"${written}" names a setting twice`, { hint });
  }
  return { text, kind, settings };
}

/** Value of an expression at settings in canonical units; null when one of them is not given. */
export function evaluate({ kind, settings: names }: Expression, settings: ReadonlyMap<string, number>): number | null {
  const values = names.map((name) => settings.get(name));
  if (values.some((value) => value === undefined)) return null;
  const [first, second] = values as number[];
  if (kind === "ratio") return first / second;
  return (values as number[]).reduce((sum, value) => sum + value, 0);
}

/** Lowest and highest value an expression can take when every setting stays in its range (ranges above zero). */
export function reach(
  { kind, settings }: Expression,
  ranges: ReadonlyMap<string, { low: number; high: number }>,
): { low: number; high: number } | null {
  const sides = settings.map((name) => ranges.get(name));
  if (sides.some((side) => side === undefined)) return null;
  const [first, second] = sides as { low: number; high: number }[];
  if (kind === "ratio") {
    return second.low > 0 ? { low: first.low / second.high, high: first.high / second.low } : null;
  }
  return (sides as { low: number; high: number }[]).reduce((sum, side) => ({
    low: sum.low + side.low,
    high: sum.high + side.high,
  }));
}
