/** Keys that must do nothing, or say why they do nothing and where they work. */
import { describe, expect, test } from "vitest";
import { screenText } from "../../../cli/screens/compose.ts";
import { reduce } from "../../../cli/screens/reduce.ts";
import { type Event, type State, type Step, startState } from "../../../cli/screens/state.ts";
import { FakeDesk } from "../../support/fake-desk.ts";

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

describe("in a window too small to draw in", () => {
  const tiny = press(chamber, { kind: "size", columns: 50, rows: 10 }).state;

  test("no key does anything but leave", () => {
    for (const keys of [["x", "y"], ["l"], ["p"], ["right"], ["q"], ["ctrl-z"], ["8"]]) {
      const step = press(tiny, ...keys);
      expect(step.effects).toEqual([]);
      expect(step.state).toEqual(tiny);
    }
    expect(press(tiny, { kind: "paste", text: "y" }).state).toEqual(tiny);
    expect(press(tiny, "Q").effects).toEqual([{ do: "leave" }]);
    expect(press(tiny, "ctrl-c").effects).toEqual([{ do: "leave" }]);
  });

  test("a question that was open waits, and is answered when there is room again", () => {
    const asked = press(chamber, "x", { kind: "size", columns: 50, rows: 10 });
    expect(press(asked.state, "y").effects).toEqual([]);
    const back = press(asked.state, "y", { kind: "size", columns: 80, rows: 24 }, "y");
    expect(back.effects).toEqual([{ do: "clean", chamber: "A2" }]);
  });
});

describe("a paste of several lines", () => {
  test.each([
    ["a reading", ["l"]],
    ["a value", ["8"]],
    ["a command's name", [":"]],
  ])("into %s is only its first line, and says so", (_what, keys) => {
    const step = press(chamber, ...keys, { kind: "paste", text: "20", more: true });
    expect(step.state.message?.text).toContain("only the first");
    expect(press(chamber, ...keys, { kind: "paste", text: "20" }).state.message).toBeNull();
  });
});

describe("a key of another screen", () => {
  test("says where it works and how to get there", () => {
    expect(press(line, "c").state.message?.text).toBe("close works on the chamber screen: enter opens it, then c");
    const page = press(chamber, "?", "u").state;
    expect(page.message?.text).toBe("undo works on the chamber screen: q goes back to it, then u");
    expect(press(line, "?", "v").state.message?.text).toContain("q goes back, enter opens it, then v");
    expect(press(chamber, "?", "Z").state.message?.text).toContain("does nothing here");
  });
});

describe("what can be pressed", () => {
  test("help says of keys that cannot be pressed why not; the footer has only those that can", () => {
    const layer = press(chamber, "?").state.layers.at(-1);
    const adopts = layer?.kind === "reading" ? layer.lines.find((line) => line.startsWith("a ")) : "";
    expect(adopts).toMatch(/Adopt the proposal.*Not now: nothing to adopt yet/);
    const foot = screenText(chamber, mono).at(-1) ?? "";
    expect(foot).toContain("p propose");
    expect(foot).not.toMatch(/adopt|entered|close|undo|sheet|\(/);
  });
});
