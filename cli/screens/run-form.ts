/**
 * The form for a measured run: three fields, each checked while it is typed. A value that cannot be is refused at once; a
 * value far from what was expected is only remarked on, since the unexpected is what measuring is for.
 */
import { parseQuantity, Refusal } from "../../engine/index.ts";
import type { ChamberView, Interval } from "../../recipes/index.ts";
import { fixed } from "../text/numbers.ts";
import type { RunTyped } from "./desk.ts";
import { emptyField, type TextField } from "./text-field.ts";

export interface RunForm {
  fields: readonly [TextField, TextField, TextField];
  at: number;
}

export const emptyForm: RunForm = { fields: [emptyField, emptyField, emptyField], at: 0 };

interface FieldRule {
  name: string;
  unit: string;
  low: number;
  high: number;
  decimals: number;
}

/** Ends of what such a film can be: not limits of quality but of sense (common practice, no source). */
export const fieldRules: readonly [FieldRule, FieldRule, FieldRule] = [
  { name: "index", unit: "", low: 1.4, high: 4, decimals: 3 },
  { name: "thickness", unit: "nm", low: 1, high: 1000, decimals: 1 },
  { name: "reflectance minimum", unit: "nm", low: 200, high: 2000, decimals: 0 },
];

export interface FieldCheck {
  /** Null when empty ("-" counts as empty) or wrong. */
  value: number | null;
  problem: string | null;
  remark: string | null;
}

/** What one field says. `expected` is what the next run was expected to measure, when known. */
export function checkField(at: number, text: string, expected: Interval | null): FieldCheck {
  const rule = fieldRules[at];
  const trimmed = text.trim();
  if (trimmed === "" || trimmed === "-") return { value: null, problem: null, remark: null };
  let value: number;
  try {
    value = parseQuantity(trimmed, rule.unit === "" ? "number" : "length", { defaultUnit: rule.unit }).value;
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    const { message, hint } = error.problems[0];
    return { value: null, problem: hint === undefined ? message : `${message}: ${hint}`, remark: null };
  }
  if (value < rule.low || value > rule.high) {
    const unit = rule.unit === "" ? "" : ` ${rule.unit}`;
    return { value: null, problem: `${rule.name} is between ${rule.low} and ${rule.high}${unit}`, remark: null };
  }
  return { value, problem: null, remark: remarkOn(rule, value, expected) };
}

function remarkOn(rule: FieldRule, value: number, expected: Interval | null): string | null {
  if (expected === null) return null;
  if (value >= expected.low && value <= expected.high) return "as expected";
  const off = value - expected.mean;
  const half = Math.max(expected.high - expected.mean, expected.mean - expected.low);
  const unit = rule.unit === "" ? "" : ` ${rule.unit}`;
  const text = `${fixed(Math.abs(off), rule.decimals)}${unit} ${off > 0 ? "above" : "below"} expected`;
  return Math.abs(off) > 3 * half ? `${text}: typed right?` : text;
}

/** What the next run is expected to measure, field by field. */
export function expectedOf(view: ChamberView): [Interval | null, Interval | null, Interval | null] {
  const { index, thickness_nm, reflectance_minimum_nm } = view.now.predicted;
  return [index, thickness_nm, reflectance_minimum_nm];
}

/** The run, or the one reason why it cannot be logged yet; `marked` when that stands at a field already. */
export function runOf(form: RunForm): { run: RunTyped } | { problem: string; at: number; marked: boolean } {
  const checks = form.fields.map((field, i) => checkField(i, field.text, null));
  const wrong = checks.findIndex((check) => check.problem !== null);
  if (wrong >= 0) return { problem: checks[wrong].problem as string, at: wrong, marked: true };
  const [index, thicknessNm, reflectanceMinimumNm] = checks.map((check) => check.value);
  if (index === null && thicknessNm === null && reflectanceMinimumNm === null) {
    return { problem: "type at least one reading; leave the others empty", at: 0, marked: false };
  }
  return { run: { index, thicknessNm, reflectanceMinimumNm } };
}
