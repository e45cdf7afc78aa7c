import { describe, expect, test } from "vitest";
import { compose, screenText } from "../../../cli/screens/compose.ts";
import { reduce } from "../../../cli/screens/reduce.ts";
import { type Event, type State, startState } from "../../../cli/screens/state.ts";
import { cells } from "../../../cli/text/width.ts";
import { FakeDesk, fakeOutlook } from "../../support/fake-desk.ts";

const mono = { colour: "mono", ascii: false } as const;
const ascii = { colour: "mono", ascii: true } as const;
const desk = new FakeDesk();
const proposal = await desk.propose("A2");

function press(state: State, ...events: (Event | string)[]): State {
  return events.reduce<State>(
    (at, event) =>
      reduce(
        at,
        typeof event === "string" ? { kind: "key", name: event, text: event.length === 1 ? event : "" } : event,
      ).state,
    state,
  );
}

const start = (columns: number, rows: number) =>
  press(startState(columns, rows), { kind: "overview", overview: desk.overview() });
const open = (columns: number, rows: number, name = "A2") =>
  press(start(columns, rows), { kind: "chamber", view: desk.chamber(name), open: true });

/** Every screen there is, at a size. */
function everyScreen(columns: number, rows: number): Record<string, State> {
  const line = start(columns, rows);
  const chamber = open(columns, rows);
  const asked = press(chamber, { kind: "proposed", chamber: "A2", proposal });
  return {
    line,
    filter: press(line, "/", "a"),
    chamber,
    spectrum: press(chamber, "v"),
    runs: press(chamber, "v", "v"),
    learned: press(chamber, "v", "v", "v"),
    typing: press(chamber, "8", "3"),
    proposal: asked,
    reason: press(asked, "a", "w"),
    form: press(chamber, "l", "2", ",", "1"),
    confirm: press(chamber, "x"),
    help: press(chamber, "?"),
    commands: press(chamber, ":"),
    sheet: press(chamber, { kind: "adopted", chamber: "A2", change: "c-000043", sheet: ["silane 812 -> 835 sccm"] }),
    failure: press(chamber, { kind: "failed", text: "the proposal rests on an older book: ask again ".repeat(8) }),
  };
}

const sizes: [number, number][] = [
  [60, 18],
  [80, 24],
  [120, 40],
  [200, 50],
];

describe.each(sizes)("at %i by %i", (columns, rows) => {
  test.each(Object.keys(everyScreen(80, 24)))(
    "the %s screen fills the terminal exactly and cuts nothing in half",
    (name) => {
      const state = everyScreen(columns, rows)[name];
      expect(compose(state, mono).reduce((sum, band) => sum + band.height, 0)).toBe(rows);
      for (const band of compose(state, mono))
        expect(band.panes.reduce((sum, pane) => sum + pane.width, 0)).toBe(columns);
      const lines = screenText(state, mono);
      expect(lines).toHaveLength(rows);
      for (const line of lines) expect(cells(line)).toBeLessThanOrEqual(columns);
    },
  );

  test.each(Object.keys(everyScreen(80, 24)))("the %s screen has a plain ASCII twin", (name) => {
    // what leaves is checked again when painted; here no sign may have been missed so far that it shows as "?" there
    const text = screenText(everyScreen(columns, rows)[name], ascii).join("\n").replaceAll("…", "~");
    expect(text).toMatch(/^[\n -~]*$/);
  });
});

describe("at 80 by 24, without colour, one can tell", () => {
  const say = (name: string) => screenText(everyScreen(80, 24)[name], mono).join("\n");

  test("which chamber needs what, and what to press", () => {
    const text = say("line");
    for (const words of [
      "A2 blue",
      "OFF: ask for a proposal (p)",
      "UNSURE: measure a run",
      "FINE: leave it alone",
      "in goal 11 %, unlikely",
      "4.4 nm low",
      "above",
      "below",
      "enter open",
      "? help",
    ])
      expect(text).toContain(words);
    expect(text.indexOf("A2 blue")).toBeLessThan(text.indexOf("B1 blue"));
  });

  test("where the film is and what is expected, with the settings and the range of each", () => {
    const text = say("chamber");
    for (const words of [
      "Saltmarsh 2 / A2 / blue",
      "goal index 2.06 ±0.02",
      "silane",
      "temperature",
      "├",
      "2.043 ±0.013",
      "84.6 ±1.6",
      "R minimum nm",
      "all in goal",
      "lost mA/cm2",
      "deep blue",
      "● now",
      "┌",
      "┘",
    ])
      expect(text).toContain(words);
  });

  test("what is proposed, why, what cannot be told, and the cautions", () => {
    const text = say("proposal");
    for (const words of [
      "A2: change the settings",
      "812  ->     835 sccm",
      "because",
      "cannot tell",
      "cautions",
      "interlock",
      "a adopt",
      "94 %  very likely",
    ])
      expect(text).toContain(words);
  });

  test("what is wrong with a reading while it is typed", () => {
    expect(say("form")).toContain('! "2,1" has a decimal comma');
    expect(say("form")).toContain("expected 84.6 ±1.6");
  });

  test("what a typed value will be for", () => {
    expect(say("typing")).toMatch(/▸ silane +812 +83_/);
  });

  test("that a long message goes on, and where to read all of it", () => {
    expect(say("failure")).toContain("(all of it: m)");
  });

  test("what fits of the footer never hides the way back", () => {
    for (const [name, state] of Object.entries(everyScreen(60, 18))) {
      const foot = screenText(state, mono).at(-1) ?? "";
      expect(foot, name).toMatch(/q back|esc give up|n no|q leave|Q leave|\? help/);
    }
  });
});

describe("the chamber screen", () => {
  test("says when a what-if leaves the qualified window", () => {
    const chamber = open(80, 24);
    const draft = new Map(chamber.chamber?.draft).set("silane", 1150);
    for (const [columns, rows] of sizes) {
      const sized = press(chamber, { kind: "size", columns, rows });
      const state = press(sized, ..."1150", "enter", {
        kind: "looked",
        chamber: "A2",
        settings: draft,
        outlook: fakeOutlook(draft),
      });
      const text = screenText(state, mono).join("\n");
      expect(text).toContain("OUTSIDE the qualified window");
      // which limit, all of it, on more lines where it is narrow
      expect(text.replace(/\s+/g, " ")).toContain("OUTSIDE: silane 1101 sccm is above the window's 1100 sccm");
    }
  });

  test("shows an alarm in words", () => {
    expect(screenText(open(80, 24, "B1"), mono).join("\n")).toContain("ALARM thickness of run 106");
  });

  test("survives a chamber of which nothing is known", () => {
    const chamber = open(80, 24);
    const view = desk.chamber("A2");
    const nothing = {
      ...view.now,
      film: null,
      predicted: { index: null, thickness_nm: null, weighted_reflectance_percent: null, reflectance_minimum_nm: null },
      chanceInGoal: null,
      spectrum: null,
      current: null,
      colour: null,
      cannotTell: ["no run was ever measured"],
    };
    const empty = press(chamber, {
      kind: "chamber",
      view: {
        ...view,
        now: nothing,
        proposal: null,
        runs: [],
        learned: [],
        plane: { index: [], thicknessNm: [], weightedReflectancePercent: [] },
      },
      open: true,
    });
    const text = screenText(empty, mono).join("\n");
    expect(text).toContain("not known");
    expect(text).not.toMatch(/NaN|undefined|null|Infinity/);
    for (const keys of [["v"], ["v", "v"], ["v", "v", "v"]])
      expect(screenText(press(empty, ...keys), mono).join("\n")).not.toMatch(/NaN|undefined|null/);
  });

  test("keeps the chosen one in view when there are more settings than rows", () => {
    const view = desk.chamber("A2");
    const many = Array.from({ length: 30 }, (_, i) => ({ ...view.settings[0], name: `zone_${i}` }));
    const values = new Map(many.map((setting) => [setting.name, 500]));
    const state = press(open(80, 24), {
      kind: "chamber",
      view: { ...view, settings: many, now: { ...view.now, settings: values } },
      open: true,
    });
    expect(screenText(press(state, "end"), mono).join("\n")).toContain("▸ zone_29");
  });

  test("neutralises escape sequences in names and sentences", () => {
    const view = desk.chamber("A2");
    const state = press(open(80, 24), {
      kind: "chamber",
      view: {
        ...view,
        recipe: "bl\u001b[31mue",
        alarms: ["\u001b]0;title\u0007boo"],
        settings: view.settings.map((one, i) =>
          i === 0 ? { ...one, name: "si\u001b[2Jlane", unit: "sc\u009bcm" } : one,
        ),
      },
      open: true,
    });
    expect(screenText(state, mono).join("\n")).not.toMatch(/[\u0000-\u0009\u000b-\u001f\u007f-\u009f]/);
  });
});

describe("at 60 by 18 nothing that matters is cut", () => {
  const asked = press(open(60, 18), { kind: "proposed", chamber: "A2", proposal }, "q");
  const screens = { line: start(60, 18), chamber: open(60, 18), asked };

  test.each([mono, ascii])("neither goal nor hint, state nor chance (%o)", (look) => {
    for (const [name, state] of Object.entries(screens)) {
      const lines = screenText(state, look);
      expect(lines.join("\n"), name).not.toMatch(look.ascii ? /[a-z0-9]~( |$)/m : /…/);
      expect(lines[1], name).toMatch(/2\.06.*88.*2\.5.*600.*15 nm$/);
    }
    expect(screenText(screens.line, look).join("\n")).toContain("in goal 11 %");
  });

  test("units and intervals stand beside both columns", () => {
    const text = screenText(asked, mono).join("\n");
    expect(text).toMatch(/silane +812 +835 sccm/);
    expect(text).toMatch(/thick nm 84\.6 ±1\.6 +87\.\d ±1\.6|thick nm 84\.6 ±1\.6 +88\.\d ±1\.6/);
    expect(text).toMatch(/index +2\.043 ±0\.013 +2\.0\d\d ±0\.013/);
  });

  test("an alarm is on the screen even then", () => {
    expect(screenText(open(60, 18, "B1"), mono).join("\n")).toContain("ALARM");
  });
});

test.each(sizes)("what was learned says at %i by %i when there is more of it, and i shows all", (columns, rows) => {
  const view = desk.chamber("A2");
  const learned = Array.from({ length: 60 }, (_, i) => `fact ${i} of the chamber, said at some length`);
  const many = press(open(columns, rows), { kind: "chamber", view: { ...view, learned }, open: true });
  if (many.chamber !== null) many.chamber.picture = "learned";
  expect(screenText(many, mono).join("\n")).toMatch(/more lines: i/);
  expect(screenText(press(many, "i", "end"), mono).join("\n")).toContain("ammonia hardly moved");
});

test("runs at 80 by 24 are whole, and the clean between them is drawn", () => {
  const text = screenText(press(open(80, 24), "v", "v"), mono).join("\n");
  expect(text).not.toContain("…");
  expect(text).toContain("-- clean --");
  expect(text).toContain("139");
});

describe("a chamber past its anchor", () => {
  const past = "past_anchor: the correction needed would take silane 6 % above the last qualified recipe";

  test("waits for a person, which is no fault", () => {
    const overview = desk.overview();
    const row = { ...overview.chambers[0], attention: "fault" as const, alarm: "past_anchor" };
    for (const [columns, rows] of sizes) {
      const state = press(startState(columns, rows), { kind: "overview", overview: { ...overview, chambers: [row] } });
      const text = screenText(state, mono).join("\n");
      expect(text).toContain("A PERSON MUST LOOK");
      expect(text).not.toContain("FAULT");
    }
    const answer = { ...proposal, advice: "fault" as const, alarms: [past] };
    const asked = press(open(80, 24), { kind: "proposed", chamber: "A2", proposal: answer });
    expect(screenText(asked, mono).join("\n")).toContain("A2: a person must look before more is corrected");
    expect(screenText(press(asked, "a"), mono).join("\n")).toContain("before a person has looked");
  });
});

test("a chamber is held against the goal of its own recipe", () => {
  const overview = desk.overview();
  const [first, ...rest] = overview.chambers;
  const own = { ...first, recipe: "thick", goal: { thicknessNm: { value: 84, within: 2 } } };
  const state = press(startState(80, 24), { kind: "overview", overview: { ...overview, chambers: [own, ...rest] } });
  const text = screenText(state, mono).join("\n");
  expect(text).not.toContain("4.4 nm low");
  expect(text).toContain("no goal for it");
});

describe("the line screen", () => {
  test("keeps the chosen chamber in view among many", () => {
    const overview = desk.overview();
    const many = Array.from({ length: 40 }, (_, i) => ({ ...overview.chambers[0], chamber: `C${i}` }));
    let state = press(startState(80, 24), { kind: "overview", overview: { ...overview, chambers: many } });
    for (let i = 0; i < 40; i++) {
      expect(screenText(state, mono).join("\n")).toContain(`▸ C${i} `);
      state = press(state, "down");
    }
  });

  test("says so when no chamber is declared or none matches", () => {
    const none = press(startState(80, 24), { kind: "overview", overview: { ...desk.overview(), chambers: [] } });
    expect(screenText(none, mono).join("\n")).toContain("no chamber");
    expect(screenText(press(start(80, 24), "/", "z", "z"), mono).join("\n")).toContain("no chamber matches");
  });
});

test.each([
  [59, 24],
  [80, 17],
  [20, 5],
  [1, 1],
])("at %i by %i one line asks for more room, and nothing is lost", (columns, rows) => {
  const chamber = open(80, 24);
  const small = press(chamber, "right", { kind: "size", columns, rows });
  const lines = screenText(small, mono);
  expect(lines).toHaveLength(rows);
  expect("enlarge to 60x18 or more").toContain(lines[0].replace("…", "").slice(0, 20));
  const back = press(small, { kind: "size", columns: 80, rows: 24 });
  // one step above the 835 sccm that are proposed
  expect(back.chamber?.draft.get("silane")).toBe(836);
});

test("two hundred sizes in a row draw without a fault", () => {
  let state = open(80, 24);
  let seed = 1;
  for (let i = 0; i < 200; i++) {
    seed = (seed * 1103515245 + 12345) % 2147483648;
    state = press(
      state,
      { kind: "size", columns: 20 + (seed % 200), rows: 5 + ((seed >> 8) % 56) },
      i % 7 === 0 ? "v" : "right",
    );
    const lines = screenText(state, mono);
    expect(lines).toHaveLength(state.rows);
    for (const line of lines) expect(cells(line)).toBeLessThanOrEqual(state.columns);
  }
});
