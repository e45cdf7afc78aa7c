/** All chambers as text for people, 80 columns: a short block each, the most urgent first, then side by side. */
import type { Watched, WatchedChamber } from "../../recipes/index.ts";
import { cleanSentence, driftSentence, forecastSentence, safeText } from "../../recipes/index.ts";
import { chanceText, fixed, indexText, thicknessText } from "./numbers.ts";
import { left, wrap } from "./width.ts";

const width = 80;

const heads: Record<WatchedChamber["urgency"], string> = {
  fault: "FAULT, find it first",
  out: "OUT OF GOAL, ask for a proposal",
  enter: "OPEN, a change is to be typed in",
  ask: "UNSURE, measure once more",
  leaving: "LEAVING its goal soon",
  read: "UNREAD, readings are awaited",
  close: "OPEN, a change is to be closed",
  fine: "FINE, leave it alone",
  unknown: "NOT KNOWN",
};

const line = (text: string) => wrap(safeText(text), width - 4).map((part, at) => `${at === 0 ? "  " : "    "}${part}`);

function block(c: WatchedChamber): string[] {
  const since = c.cleaned ? `${c.k} depositions since the clean` : `${c.k} depositions, no clean logged`;
  const several = c.recipes.length > 1;
  // One clean for the whole chamber: beside the recipe that leaves its goal first.
  const soonest = c.recipes
    .map((w) => w.forecast)
    .filter((f) => f !== null)
    .sort((a, b) => (a.outBy.half ?? 1e9) - (b.outBy.half ?? 1e9))[0];
  const clean = cleanSentence(c.habit, soonest ?? null);
  return [
    ...wrap(
      `${safeText(c.chamber)}, ${several || c.recipes.length === 0 ? "" : `recipe ${safeText(c.recipes[0].recipe)}, `}${since}: ${heads[c.urgency]}`,
      width,
    ),
    ...c.alarms.flatMap((a) => line(`alarm ${a.sentence}`)),
    ...c.recipes.flatMap((w) => [
      ...(several ? line(`recipe ${w.recipe}`) : []),
      ...line(forecastSentence(w.forecast)),
      ...line(driftSentence(w.drift)),
      ...w.due.flatMap((d) => line(`due: ${d}`)),
      ...line(w.capability.sentence),
    ]),
    ...(clean ? line(clean) : []),
    ...c.trouble.flatMap(({ message, hint }) => line(`${message}${hint ? `: ${hint}` : ""}`)),
  ];
}

function sideBySide(chambers: readonly WatchedChamber[], recipe: string): string[] {
  const rows = chambers.flatMap((c) =>
    c.recipes
      .filter((w) => w.recipe === recipe)
      .map(({ next: { index, thicknessNm, chance } }) => [
        c.chamber,
        `${indexText(index.mean)} (${indexText(index.low)}-${indexText(index.high)})`,
        `${thicknessText(thicknessNm.mean)} (${thicknessText(thicknessNm.low)}-${thicknessText(thicknessNm.high)})`,
        chanceText(chance),
      ]),
  );
  const table = [["chamber", "index", "nm", "in goal"], ...rows];
  const widths = table[0].map((_, i) => Math.min(24, Math.max(...table.map((r) => r[i].length))));
  return [
    "",
    ...wrap(
      `side by side under ${safeText(recipe)}, each at its own settings in force: the next film, middle 95 %`,
      width,
    ),
    ...table.map((row) => `  ${row.map((cell, i) => left(safeText(cell), widths[i])).join("  ")}`.trimEnd()),
  ];
}

/** The false alarms the slow-shift detector promises over the line, a month. */
function promised(chambers: readonly WatchedChamber[]): string[] {
  const known = chambers.filter((c) => c.falseAlarmsAMonth !== null);
  if (known.length === 0) return [];
  const sum = known.reduce((s, c) => s + (c.falseAlarmsAMonth ?? 0), 0);
  const which = known.length === chambers.length ? "" : ` (${known.map((c) => c.chamber).join(", ")})`;
  return [
    "",
    ...wrap(
      `With nothing wrong the slow_shift alarm comes ${fixed(sum, 2)} times a month at these rates of measured runs${which}.`,
      width,
    ),
  ];
}

export function watchText({ chambers, shared }: Watched): string {
  const untold = [...new Set(chambers.flatMap((c) => c.recipes.map((w) => w.forecast?.cannotTell ?? null)))].filter(
    (t) => t !== null,
  );
  return [
    ...chambers.flatMap((c, i) => [...(i > 0 ? [""] : []), ...block(c)]),
    ...shared.flatMap((recipe) => sideBySide(chambers, recipe)),
    ...promised(chambers),
    ...untold.flatMap((t) => ["", ...wrap(`not in the forecasts: ${safeText(t)}`, width)]),
  ].join("\n");
}
