/**
 * A changed line file is part of the record: what changed, and loudly whether a window, a range, an anchor or a goal was
 * loosened. Compared are the text (for people) and the meaning (for what was loosened).
 */
import type { AnchorLimit, Goal, Line, WindowLimit } from "../line/line.ts";
import { readLine } from "../line/read-line.ts";

/** Lines taken out and put in, comments and blank lines left aside; at most 200. */
export function textDifference(before: string, after: string): string[] {
  const lines = (text: string) =>
    text
      .split(/\r?\n/)
      .map((l) => l.replace(/(^|\s)#.*$/, "").trimEnd())
      .filter((l) => l.trim() !== "");
  const old = lines(before);
  const now = lines(after);
  const out: string[] = [];
  for (const line of old) if (!now.includes(line)) out.push(`- ${line.trim()}`);
  for (const line of now) if (!old.includes(line)) out.push(`+ ${line.trim()}`);
  return out.slice(0, 200).map((line) => line.slice(0, 1000));
}

/** What the new line allows that the old one did not, a sentence each. Empty when the old text can no longer be read. */
export function loosened(before: string, line: Line, readFile: (name: string) => Uint8Array): string[] {
  let old: Line;
  try {
    old = readLine(before, "line.yaml as it was", { readFile });
  } catch {
    return ["The line file as it was cannot be read any more, so what was loosened is not known."];
  }
  const out: string[] = [];
  for (const [name, was] of old.settings) {
    const now = line.settings.get(name);
    if (now && (now.low < was.low || now.high > was.high)) out.push(`The range of ${name} was widened.`);
  }
  const limits = (list: readonly WindowLimit[]) => new Map(list.map((l) => [l.text, l]));
  const windowNow = limits(line.window);
  for (const was of old.window) {
    const now = windowNow.get(was.text);
    if (!now) out.push(`The window limit on ${was.text} was taken out.`);
    else if (now.low < was.low || now.high > was.high) out.push(`The window limit on ${was.text} was widened.`);
  }
  const anchors = (list: readonly AnchorLimit[]) => new Map(list.map((l) => [l.text, l.fraction]));
  const anchorNow = anchors(line.anchor);
  for (const [text, was] of anchors(old.anchor)) {
    const now = anchorNow.get(text);
    if (now === undefined) out.push(`The anchor on ${text} was taken out.`);
    else if (now > was) out.push(`The anchor on ${text} was widened from ${100 * was} % to ${100 * now} %.`);
  }
  out.push(...goalsLoosened("", old.goal, line.goal));
  for (const [recipe, was] of old.recipes)
    out.push(...goalsLoosened(`${recipe}: `, was.goal, line.recipes.get(recipe)?.goal ?? line.goal));
  return out;
}

function goalsLoosened(where: string, was: Goal, now: Goal): string[] {
  const out: string[] = [];
  for (const key of ["index", "thicknessNm", "reflectanceMinimumNm"] as const) {
    const a = was[key];
    const b = now[key];
    if (a && !b) out.push(`${where}the goal in ${key} was taken out.`);
    else if (
      a &&
      b &&
      (b.value - b.within < a.value - a.within - 1e-12 || b.value + b.within > a.value + a.within + 1e-12)
    )
      out.push(
        `${where}the goal in ${key} was widened or moved from ${a.value} within ${a.within} to ${b.value} within ${b.within}.`,
      );
  }
  const a = was.weightedReflectancePercent;
  const b = now.weightedReflectancePercent;
  if (a && (!b || b.atMost > a.atMost))
    out.push(`${where}the limit on weighted reflectance was ${b ? `raised to ${b.atMost} %` : "taken out"}.`);
  return out;
}
