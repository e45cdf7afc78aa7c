/** In a rehearsal the program advises what it advises over a book on disk that says the same. */
import { describe, expect, it } from "vitest";
import { decide } from "../../../recipes/advice/decide.ts";
import { question } from "../../../recipes/desk/asking.ts";
import { ours } from "../../../recipes/desk/our-practice.ts";
import { LINE_FILE, Workspace } from "../../../recipes/index.ts";
import type { AnyDraft } from "../../../recipes/record/entries.ts";
import { scenarioNamed } from "../../../recipes/rehearsal/scenarios.ts";
import type { Brief, Reading, Stage } from "../../../recipes/rehearsal/stage.ts";
import { MemoryFiles, memoryPorts } from "../../support/memory-files.ts";

const units: Record<string, string> = {
  silane: "sccm",
  ammonia: "sccm",
  time: "s",
  power: "W",
  pressure: "Pa",
  temperature: "degC",
};
const under = "X1";
const sorted = (settings: ReadonlyMap<string, number>) => [...settings].sort(([a], [b]) => (a < b ? -1 : 1));

function lineText({ goal, aim, tolerance, gauge, levers, ratio, sisters }: Brief): string {
  return [
    "line: rehearsal",
    "time_zone: UTC",
    "wafer: { surface: polished, seen_from: air }",
    "goal:",
    `  index: ${goal.index} within ${tolerance.index}`,
    `  thickness: ${goal.thicknessNm} nm within ${tolerance.thicknessNm} nm`,
    "light: { from: 300 nm, to: 1100 nm, weight: photons }",
    "gauges:",
    `  ellipsometer: { on: polished, index: ${gauge.index}, thickness: ${gauge.thicknessNm} nm, correlation: ${gauge.correlation} }`,
    "settings:",
    ...levers.map(
      (l) =>
        `  ${l.name}: { range: ${l.low}..${l.high} ${units[l.name]}, smallest: ${l.smallest} ${units[l.name]}, tune: ${l.tune} }`,
    ),
    "window:",
    `  ammonia/silane: ${ratio[0]}..${ratio[1]}`,
    // What the reference recipe was meant to lay; the goal above is the newly wanted film.
    `recipes: { first: { goal: { index: ${aim.index} within 0.02, thickness: ${aim.thicknessNm} nm within 2 nm } } }`,
    "chambers:",
    `  ${under}: {}`,
    ...sisters.map((_, i) => `  S${i}: {}`),
    "",
  ].join("\n");
}

/** The same line as a folder with a book: first its sisters' logs. */
async function bookOf(brief: Brief) {
  const files = new MemoryFiles(["/line"]);
  const ports = memoryPorts(files);
  const bytes = new TextEncoder().encode(lineText(brief));
  const handle = files.createExclusive(`/line/${LINE_FILE}`);
  files.write(handle, bytes, 0, bytes.length, null);
  files.close(handle);
  const ws = new Workspace("/line", ports);
  let at = Date.UTC(2026, 0, 1);
  ports.clock.ms = at + 400 * 3_600_000;
  const write = (draft: AnyDraft) => {
    at += 3_600_000;
    return ws.book.append({ ...draft, at: new Date(at).toISOString() });
  };
  const steps = (settings: ReadonlyMap<string, number>) => [
    { settings: Object.fromEntries([...settings].map(([name, value]) => [name, { value, unit: units[name] }])) },
  ];
  const run = (chamber: string, settings: ReadonlyMap<string, number>, reading: Reading | null) =>
    write({
      kind: "run",
      data: {
        chamber,
        recipe: "blue",
        settings_from: "given",
        steps: steps(settings),
        count: 1,
        readings: reading
          ? [
              {
                gauge: "ellipsometer",
                on: "polished",
                sites: brief.gauge.sites,
                ...(reading.index === null ? {} : { index: reading.index }),
                ...(reading.thicknessNm === null ? {} : { thickness_nm: reading.thicknessNm }),
              },
            ]
          : [],
      },
    });
  const recipe = (settings: ReadonlyMap<string, number>, name = "blue") =>
    write({ kind: "recipe", data: { chamber: under, recipe: name, steps: steps(settings) } });
  await recipe(brief.reference, "first");
  await recipe(brief.reference);
  for (const [i, sister] of brief.sisters.entries())
    for (const event of sister.log) if (event.kind === "run") await run(`S${i}`, event.settings, event.reading);
  return { ws, run, recipe, clean: () => write({ kind: "clean", data: { chamber: under } }) };
}

/** Plays tuning and a clean with the program's own hand, asking the desk the same at each step. */
async function compared(stage: Stage, steps: readonly ("run" | "clean")[]) {
  const { brief } = stage;
  const chamber = stage.chamber();
  const hand = ours.begin(brief, { film: () => brief.goal });
  const book = await bookOf(brief);
  let inForce: ReadonlyMap<string, number> = brief.reference;
  const told: { hand: unknown; desk: unknown }[] = [];
  for (const step of steps) {
    const answer = decide(question(book.ws, under, "blue", null));
    const settings = hand.next();
    const said = hand.says?.();
    const moves = answer.advice === "change" || answer.advice === "out_of_reach";
    told.push({
      hand: {
        mode: said?.mode,
        advice: said?.advice,
        done: said?.done,
        chance: said?.chance?.toFixed(9),
        settings: sorted(settings),
      },
      desk: {
        mode: answer.mode,
        advice: answer.advice,
        done: answer.done,
        chance: (moves ? answer.ahead : answer.now).chanceInGoal?.toFixed(9),
        settings: sorted(moves ? answer.after : inForce),
      },
    });
    if (moves) await book.recipe(answer.after);
    inForce = settings;
    if (step === "clean") {
      if (chamber.clean().written) {
        hand.cleaned();
        await book.clean();
      }
      continue;
    }
    const { reading } = chamber.run(settings);
    hand.saw({ settings, reading, tuning: false });
    await book.run(under, settings, reading);
  }
  return told;
}

describe("the program in a rehearsal", () => {
  it.each([
    ["base", "a new chamber beside three sisters", ["run", "run", "run", "clean", "run", "run"]],
    ["cold", "a new chamber alone", ["run", "run", "run", "clean", "run"]],
    ["new-tube", "settings that are not tuned", ["run", "run", "run", "clean", "run"]],
    ["tight", "tuning and production by turns", Array.from({ length: 12 }, () => "run")],
  ] as [string, string, ("run" | "clean")[]][])(
    "says in %s what the desk says over the same book (%s)",
    async (name, _, steps) => {
      const told = await compared(scenarioNamed(name).stage("desk-2"), steps);
      expect(told.map((t) => t.hand)).toEqual(told.map((t) => t.desk));
      expect(new Set(told.map((t) => JSON.stringify(t.hand))).size).toBeGreaterThan(3);
    },
  );
});
