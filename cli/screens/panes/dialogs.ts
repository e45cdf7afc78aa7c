/**
 * What is asked at the bottom of the screen: a yes or no, a reason, a name to type, the form for a run.
 */
import type { Interval } from "../../../recipes/index.ts";
import { type Look, signs } from "../../palette.ts";
import { withHalf } from "../../text/numbers.ts";
import { type Row, words } from "../../text/rows.ts";
import { cells, left, wrap } from "../../text/width.ts";
import { enteringQuestion, settingsToRead, valueText } from "../reduce-entering.ts";
import { checkField, expectedOf, fieldRules, type RunForm } from "../run-form.ts";
import { type Layer, openChangeOf, type State } from "../state.ts";
import type { TextField } from "../text-field.ts";

/** Rows of the question on top, or null when the layer on top is a page and not a question. */
export function dialogRows(state: State, layer: Layer, width: number, look: Look): Row[] | null {
  const rule: Row = [{ text: signs(look).rule.repeat(width), tone: "quiet" }];
  switch (layer.kind) {
    case "confirm":
      return [
        rule,
        ...wrap(words(`${layer.question}  y or n`, look).text, width).map((text): Row => [{ text, tone: "strong" }]),
      ];
    case "entering":
      return [
        rule,
        ...wrap(words(`${enteringQuestion(state, layer)}  y, d or n`, look).text, width).map(
          (text): Row => [{ text, tone: "strong" }],
        ),
      ];
    case "read-back":
      return [rule, ...readBackRows(state, layer, width, look)];
    case "reason":
      return [
        rule,
        [{ ...words(layer.title, look), tone: "strong" }],
        ...layer.about.flatMap((text) => wrap(words(text, look).text, width)).map((text): Row => [{ text }]),
        fieldRow("reason ", layer.field, width, look),
      ];
    case "name":
      return [
        rule,
        ...wrap(words(layer.question, look).text, width).map((text): Row => [{ text, tone: "alarm" }]),
        fieldRow("name ", layer.field, width, look),
      ];
    case "form":
      return [rule, ...formRows(state, layer.chamber, layer.form, width, look)];
    default:
      return null;
  }
}

/** A field with its cursor, the end of the text in view. */
export function fieldRow(label: string, field: TextField, width: number, look: Look): Row {
  const room = width - cells(label) - 2;
  const signsOf = [...field.text];
  // Shows the part around the cursor when the text is longer than the row.
  const first = Math.max(0, field.at - room + 1);
  const before = words(signsOf.slice(first, field.at).join(""), look).text;
  const under = words(signsOf[field.at] ?? " ", look).text;
  const after = words(signsOf.slice(field.at + 1, first + room).join(""), look).text;
  return [{ text: label }, { text: before }, { text: under, tone: "chosen" }, { text: after }];
}

/** Which setting, what was adopted, and what it reads. */
function readBackRows(state: State, layer: Extract<Layer, { kind: "read-back" }>, width: number, look: Look): Row[] {
  const settings = settingsToRead(state, layer);
  const setting = settings[layer.at];
  if (setting === undefined) return [[{ text: "reading the chamber..." }]];
  const adopted = valueText(setting, layer.change.after.get(setting.name));
  return [
    [{ ...words(`${layer.change.change}: which value reads back differently?`, look), tone: "strong" }],
    [words(`adopted  ${setting.name} ${adopted}   (${layer.at + 1} of ${settings.length}: up, down)`, look)],
    fieldRow(words(`reads    ${setting.name}, ${setting.unit}: `, look).text, layer.field, width, look),
  ];
}

function formRows(state: State, name: string, form: RunForm, width: number, look: Look): Row[] {
  const view = state.chamber !== null && state.chamber.view.chamber === name ? state.chamber.view : null;
  const expected: readonly (Interval | null)[] = view === null ? [null, null, null] : expectedOf(view);
  const rows: Row[] = [
    [
      { ...words(`log a run of ${name}`, look), tone: "strong" },
      words(
        width < 70
          ? ` at the settings in force${view === null ? "" : ` (${view.recipe})`}`
          : `   settings: those in force${view === null ? "" : ` (${view.recipe})`}; empty: not measured`,
        look,
      ),
    ],
  ];
  const below: Row[] = [];
  // Where what is expected of a field, or remarked on it, begins.
  const noteAt = width < 70 ? 38 : 42;
  fieldRules.forEach((rule, i) => {
    const field = form.fields[i];
    const check = checkField(i, field.text, expected[i]);
    const active = form.at === i;
    const hope = expected[i] === null ? "" : `expected ${withHalf(expected[i], rule.decimals)}`;
    const remark = check.remark ?? hope;
    const fits = cells(words(remark, look).text) <= width - noteAt;
    const note = check.problem === null ? (fits ? remark : "see below") : active ? "! see below" : "! cannot be";
    const detail = check.problem === null ? (fits ? null : remark) : `! ${check.problem}`;
    if (active && detail !== null)
      for (const text of wrap(words(detail, look).text, width)) below.push([{ text, tone: "watch" }]);
    const label = `${active ? signs(look).pointer : " "} ${left(`${rule.name}${rule.unit === "" ? "" : `, ${rule.unit}`}`, 25)}`;
    const shown = active ? fieldRow(label, field, noteAt, look) : [{ text: label }, words(field.text, look)];
    const used = shown.reduce((sum, segment) => sum + cells(segment.text), 0);
    rows.push([
      ...shown,
      { text: " ".repeat(Math.max(1, noteAt - used)) },
      { ...words(note, look), tone: check.problem === null ? "plain" : "watch" },
    ]);
  });
  const change = openChangeOf(state, name);
  if (change?.state === "adopted") {
    const booked = `${change.change} is adopted but not entered: this run is booked on the settings before it`;
    for (const text of wrap(words(booked, look).text, width)) rows.push([{ text, tone: "watch" }]);
  }
  // Always one row for what is wrong, so that the form does not jump while one types.
  return [...rows, ...(below.length > 0 ? below : [[]])];
}
