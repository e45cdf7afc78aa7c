import { describe, expect, test } from "vitest";
import { screenText } from "../../../cli/screens/compose.ts";
import { reduce } from "../../../cli/screens/reduce.ts";
import { type Event, type State, type Step, startState } from "../../../cli/screens/state.ts";
import { FakeDesk, fakeOutlook } from "../../support/fake-desk.ts";

const desk = new FakeDesk();
const mono = { colour: "mono", ascii: false } as const;

function key(name: string): Event {
  return { kind: "key", name, text: name.length === 1 ? name : name === "space" ? " " : "" };
}

/** The step after the last of the events. */
function press(state: State, ...events: (Event | string)[]): Step {
  let step: Step = { state, effects: [] };
  for (const event of events) step = reduce(step.state, typeof event === "string" ? key(event) : event);
  return step;
}

const line = press(startState(80, 24), { kind: "overview", overview: desk.overview() }).state;
const chamber = press(line, { kind: "chamber", view: desk.chamber("A2"), open: true }).state;

describe("the line screen", () => {
  test("chooses the first chamber, the one that needs attention first", () => {
    expect(line.chosen).toBe("A2");
  });

  test("moves with arrows and letters, and stops at both ends", () => {
    expect(press(line, "down").state.chosen).toBe("B1");
    expect(press(line, "j", "j", "j", "j").state.chosen).toBe("A1");
    expect(press(line, "G", "k", "up", "up", "up").state.chosen).toBe("A2");
  });

  test("keeps the choice when the overview is read again", () => {
    const moved = press(line, "down", { kind: "overview", overview: desk.overview() });
    expect(moved.state.chosen).toBe("B1");
  });

  test("opens the chosen chamber", () => {
    expect(press(line, "down", "enter").effects).toEqual([{ do: "open", chamber: "B1" }]);
  });

  test("filters while typing, and chooses among what is left", () => {
    const filtered = press(line, "/", "a", "1");
    expect(filtered.state.chosen).toBe("A1");
    expect(press(filtered.state, "enter", "down").state.chosen).toBe("A1");
    expect(press(filtered.state, "escape").state.filter).toBeNull();
  });

  test("a key that does nothing says so and changes nothing else", () => {
    const step = press(line, "Z");
    expect(step.state.message?.text).toContain("?");
    expect({ ...step.state, message: null, log: [] }).toEqual({ ...line, message: null, log: [] });
  });

  test("a paste gives no command", () => {
    const step = press(line, { kind: "paste", text: "Q" });
    expect(step.effects).toEqual([]);
  });
});

describe("the what-if", () => {
  const silane = (state: State) => state.chamber?.draft.get("silane");

  test("moves the chosen setting by its smallest step and asks what to expect", () => {
    const step = press(chamber, "right");
    expect(silane(step.state)).toBe(813);
    expect(step.effects).toEqual([{ do: "look", chamber: "A2", settings: step.state.chamber?.draft }]);
    expect(silane(press(chamber, "left", "-").state)).toBe(810);
    expect(silane(press(chamber, "shift-right", "pgup", "pgdn").state)).toBe(822);
  });

  test("steps in the declared unit: 10 W of a power in kW", () => {
    const step = press(chamber, "down", "down", "down", "+");
    expect(step.state.chamber?.draft.get("power")).toBe(8010);
  });

  test("stops at the end of the range, and says so", () => {
    let state = chamber;
    for (let i = 0; i < 60; i++) state = press(state, "pgup").state;
    expect(silane(state)).toBe(1200);
    const step = press(state, "right");
    expect(step.effects).toEqual([]);
    expect(step.state.message?.text).toContain("highest");
  });

  test("takes a typed value, with or without its unit", () => {
    expect(silane(press(chamber, "8", "3", "5", "enter").state)).toBe(835);
    expect(silane(press(chamber, "8", "3", "5", "space", "s", "c", "c", "m", "enter").state)).toBe(835);
    expect(silane(press(chamber, ".", "8", "3", "s", "l", "m", "enter").state)).toBe(830);
  });

  test.each([
    ["a decimal comma", ["8", ",", "5"], "comma"],
    ["a value outside the range", ["2", "0"], "300 sccm to 1200 sccm"],
    ["a value between steps", ["8", "1", "2", ".", "5"], "812 sccm and 813 sccm"],
    ["a wrong unit", ["8", "s"], "sccm, slm"],
  ])("refuses %s in words and keeps what was typed", (_what, keys, words) => {
    const step = press(chamber, ...keys, "enter");
    expect(step.state.message?.text).toContain(words);
    expect(step.state.chamber?.typing?.text).toBe(keys.join(""));
    expect(silane(step.state)).toBe(812);
    expect(press(step.state, "escape").state.chamber?.typing).toBeNull();
  });

  test("shows the answer to the newest question only", () => {
    const first = press(chamber, "right");
    const second = press(first.state, "right");
    const late = press(second.state, {
      kind: "looked",
      chamber: "A2",
      settings: first.state.chamber?.draft ?? new Map(),
      outlook: fakeOutlook(first.state.chamber?.draft ?? new Map()),
    });
    expect(late.state.chamber?.after).toBeNull();
    const draft = second.state.chamber?.draft ?? new Map();
    const good = press(second.state, {
      kind: "looked",
      chamber: "A2",
      settings: new Map(draft),
      outlook: fakeOutlook(draft),
    });
    expect(good.state.chamber?.after?.settings.get("silane")).toBe(814);
  });

  test("goes back step by step, and to the settings in force", () => {
    const moved = press(chamber, "right", "down", "right");
    expect(press(moved.state, "z").state.chamber?.draft.get("ammonia")).toBe(6900);
    expect(silane(press(moved.state, "z", "z").state)).toBe(812);
    const reset = press(moved.state, "r");
    expect(silane(reset.state)).toBe(812);
    expect(reset.state.chamber?.after).toBeNull();
    // dropping the what-if can itself be taken back
    expect(silane(press(reset.state, "z").state)).toBe(813);
  });

  test("outlives a reading of the chamber that changes nothing in it", () => {
    const moved = press(chamber, "right", { kind: "chamber", view: desk.chamber("A2"), open: false });
    expect(silane(moved.state)).toBe(813);
  });

  test("goes to the other chamber clean", () => {
    const other = press(chamber, "right", { kind: "chamber", view: desk.chamber("B1"), open: true });
    expect(other.state.chamber?.draft.get("silane")).toBe(790);
    expect(other.state.chamber?.past).toEqual([]);
  });
});

describe("a proposal", () => {
  const better = new Map(chamber.chamber?.draft).set("silane", 835);
  const proposal = {
    proposal: "p-000042",
    advice: "change",
    after: fakeOutlook(better),
    because: [],
    cannotTell: [],
    alarms: [],
    cautions: [],
    done: false,
  } as const;
  const asked = press(chamber, { kind: "proposed", chamber: "A2", proposal }, "q").state;

  test("becomes what is shown beside the settings in force", () => {
    expect(asked.chamber?.draft.get("silane")).toBe(835);
    expect(asked.chamber?.after).toBe(proposal.after);
  });

  test("stays while what it rests on stands, even where the desk does not hand it out again", () => {
    const read = press(asked, { kind: "chamber", view: { ...desk.chamber("A2"), proposal: null }, open: false }).state;
    expect(read.chamber?.view.proposal?.proposal).toBe("p-000042");
  });

  test("is gone after a further run", () => {
    const view = desk.chamber("A2");
    const runs = [...view.runs, { ...view.runs[view.runs.length - 1], entry: 999 }];
    const read = press(asked, { kind: "chamber", view: { ...view, runs, proposal: null }, open: false }).state;
    expect(read.chamber?.view.proposal).toBeNull();
    expect(read.chamber?.draft.get("silane")).toBe(812);
  });

  test("of another chamber does not touch the one open", () => {
    const other = press(chamber, { kind: "proposed", chamber: "B1", proposal }).state;
    expect(other.chamber?.view.proposal).toBeNull();
  });
});

describe("commands that cannot be given", () => {
  test.each([
    ["a", "p asks for a proposal"],
    ["e", "no open change"],
    ["c", "no open change"],
    ["u", "no open change"],
    ["s", "no open change"],
    ["r", "no what-if"],
    ["z", "no what-if"],
  ])("%s says why", (name, words) => {
    const step = press(chamber, name);
    expect(step.state.message).toMatchObject({ tone: "watch" });
    expect(step.state.message?.text).toContain(words);
    expect(step.effects).toEqual([]);
    expect(step.state.layers).toEqual([]);
  });

  test("nothing that writes starts while something is waited for", () => {
    const waiting = press(chamber, "p");
    expect(waiting.effects).toEqual([{ do: "propose", chamber: "A2" }]);
    for (const name of ["p", "l", "x"]) {
      const step = press(waiting.state, name);
      expect(step.effects).toEqual([]);
      expect(step.state.message?.text).toContain("wait");
    }
  });
});

describe("questions", () => {
  test("enter alone never confirms; only y does", () => {
    const asked = press(chamber, "x");
    expect(asked.state.layers.at(-1)?.kind).toBe("confirm");
    for (const name of ["enter", "space", "x"]) expect(press(asked.state, name).effects).toEqual([]);
    expect(press(asked.state, { kind: "paste", text: "y" }).effects).toEqual([]);
    expect(press(asked.state, "y").effects).toEqual([{ do: "clean", chamber: "A2" }]);
    expect(press(asked.state, "n").state.layers).toEqual([]);
  });

  test("a run is logged from the last field, when every field makes sense", () => {
    const typed = press(chamber, "l", ..."2.051", "enter", ..."86.4", "enter");
    const sent = press(typed.state, "enter");
    expect(sent.effects).toEqual([
      { do: "log", chamber: "A2", run: { index: 2.051, thicknessNm: 86.4, reflectanceMinimumNm: null } },
    ]);
    // it stays until the book has it
    expect(sent.state.layers.at(-1)?.kind).toBe("form");
    expect(press(sent.state, { kind: "done", text: "within noise" }).state.layers).toEqual([]);
  });

  test("an impossible reading is refused at its own field, and nothing typed is lost", () => {
    const step = press(chamber, "l", ..."20.51", "tab", ..."86.4", "tab", "enter");
    expect(step.effects).toEqual([]);
    // what is wrong with it is said once, at the field
    expect(
      screenText(step.state, mono)
        .join("\n")
        .match(/between 1.4 and 4/g),
    ).toHaveLength(1);
    expect(step.state.message?.text).toContain("not logged yet");
    const layer = step.state.layers.at(-1);
    expect(layer?.kind === "form" && [layer.form.at, ...layer.form.fields.map((field) => field.text)]).toEqual([
      0,
      "20.51",
      "86.4",
      "",
    ]);
  });

  test("an empty form logs nothing", () => {
    const step = press(chamber, "l", "tab", "tab", "enter");
    expect(step.effects).toEqual([]);
    expect(step.state.message?.text).toContain("at least one reading");
  });

  test("a refusal keeps the form and what was typed", () => {
    const sent = press(chamber, "l", ..."2.051", "tab", "tab", "enter");
    const failed = press(sent.state, { kind: "failed", text: "the line is locked by another writer" });
    expect(failed.state.busy).toBeNull();
    const layer = failed.state.layers.at(-1);
    expect(layer?.kind === "form" && layer.form.fields[0].text).toBe("2.051");
  });

  test("letters that are commands elsewhere are only letters in a field", () => {
    const proposal = {
      proposal: "p-000042",
      advice: "change",
      after: fakeOutlook(chamber.chamber?.draft ?? new Map()),
      because: [],
      cannotTell: [],
      alarms: [],
      cautions: [],
      done: false,
    } as const;
    const asked = press(chamber, { kind: "proposed", chamber: "A2", proposal }, "a", ..."qQ?:", "enter");
    expect(asked.effects).toEqual([{ do: "adopt", chamber: "A2", proposal: "p-000042", reason: "qQ?:" }]);
  });

  test("a change without a reason is not adopted", () => {
    const proposal = {
      proposal: "p-000042",
      advice: "change",
      after: fakeOutlook(chamber.chamber?.draft ?? new Map()),
      because: [],
      cannotTell: [],
      alarms: [],
      cautions: [],
      done: false,
    } as const;
    const step = press(chamber, { kind: "proposed", chamber: "A2", proposal }, "a", "space", "enter");
    expect(step.effects).toEqual([]);
    expect(step.state.message?.text).toContain("reason");
  });

  test("the nearest point that misses the goal is adopted only after the chamber's name is typed, not pasted", () => {
    const proposal = {
      proposal: "p-000042",
      advice: "out_of_reach",
      after: fakeOutlook(chamber.chamber?.draft ?? new Map()),
      because: [],
      cannotTell: [],
      alarms: [],
      cautions: [],
      done: false,
    } as const;
    const named = press(chamber, { kind: "proposed", chamber: "A2", proposal }, "a", ..."why", "enter");
    expect(named.effects).toEqual([]);
    expect(press(named.state, "enter").effects).toEqual([]);
    expect(press(named.state, { kind: "paste", text: "A2" }, "enter").effects).toEqual([]);
    expect(press(named.state, "A", "2", "enter").effects).toEqual([
      { do: "adopt", chamber: "A2", proposal: "p-000042", reason: "why" },
    ]);
  });

  test.each(["keep", "measure", "fault"] as const)("there is nothing to adopt when the advice is %s", (advice) => {
    const proposal = {
      proposal: "p-000042",
      advice,
      after: fakeOutlook(chamber.chamber?.draft ?? new Map()),
      because: [],
      cannotTell: [],
      alarms: [],
      cautions: [],
      done: false,
    };
    const step = press(chamber, { kind: "proposed", chamber: "A2", proposal }, "a");
    expect(step.state.layers.at(-1)?.kind).toBe("proposal");
    expect(step.state.message?.tone).toBe("watch");
  });
});

describe("pages and the command list", () => {
  test("help shows every key of the place it was asked from, and q goes back", () => {
    const help = press(chamber, "?");
    const layer = help.state.layers.at(-1);
    expect(layer?.kind === "reading" && layer.lines.some((line) => line.includes("smallest step"))).toBe(true);
    expect(press(help.state, "q").state).toMatchObject({ screen: "chamber", layers: [] });
  });

  test("scrolling stops at the end and comes back at once", () => {
    const help = press(chamber, "?", "end");
    const end = help.state.layers.at(-1);
    const down = press(help.state, "pgdn", "down").state.layers.at(-1);
    const up = press(help.state, "up").state.layers.at(-1);
    expect(end?.kind === "reading" && end.scroll).toBeGreaterThan(0);
    expect(down).toEqual(end);
    expect(end?.kind === "reading" && up?.kind === "reading" && up.scroll).toBe(
      (end?.kind === "reading" ? end.scroll : 0) - 1,
    );
  });

  test("a command is found by a part of its name and given", () => {
    const step = press(chamber, ":", ..."clean", "enter");
    expect(step.state.layers.at(-1)?.kind).toBe("confirm");
  });

  test("a command that cannot be given says why from the list as well", () => {
    const step = press(chamber, ":", ..."undo", "enter");
    expect(step.state.message?.text).toContain("no open change");
  });

  test("what was said can be read again", () => {
    const step = press(chamber, "e", "m");
    const layer = step.state.layers.at(-1);
    expect(layer?.kind === "reading" && layer.lines.join(" ")).toContain("no open change");
  });

  test("ctrl-c leaves from everywhere", () => {
    for (const keys of [[], ["x"], ["l"], ["?"], [":"], ["8"]]) {
      expect(press(chamber, ...keys, "ctrl-c").effects).toEqual([{ do: "leave" }]);
    }
  });
});
