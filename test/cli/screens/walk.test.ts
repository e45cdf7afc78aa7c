import { describe, expect, test } from "vitest";
import { screenText } from "../../../cli/screens/compose.ts";
import { perform } from "../../../cli/screens/perform.ts";
import { type Effect, startState } from "../../../cli/screens/state.ts";
import { type Clock, Store } from "../../../cli/screens/store.ts";
import { FakeDesk } from "../../support/fake-desk.ts";

const look = { colour: "mono", ascii: false } as const;

/** The screens without a terminal: keys in, text out, the desk behind. */
function sit(desk: FakeDesk, columns = 80, rows = 24) {
  const outside: string[] = [];
  const running: Promise<void>[] = [];
  const store = new Store(startState(columns, rows), (effect: Effect) => {
    running.push(perform(desk, effect, store.dispatch, (what) => outside.push(what)));
  });
  const settle = async () => {
    // what-if questions are asked in the next turn of the event loop
    for (let i = 0; i < 5; i++) {
      await new Promise((resolve) => setTimeout(resolve, 1));
      await Promise.all(running);
    }
  };
  const press = async (...keys: string[]) => {
    for (const name of keys)
      store.dispatch({ kind: "key", name, text: name.length === 1 ? name : name === "space" ? " " : "" });
    await settle();
  };
  const seen = () => screenText(store.read(), look).join("\n");
  const start = async () => {
    running.push(perform(desk, { do: "load" }, store.dispatch, () => {}));
    await settle();
  };
  return { store, press, seen, start, outside };
}

describe("a shift at the line", () => {
  test("from the line to a proposal, adopted, entered, its run logged, the change closed", async () => {
    const desk = new FakeDesk();
    const { press, seen, start } = sit(desk);
    await start();
    expect(seen()).toContain("OFF: ask for a proposal (p)");

    await press("enter");
    expect(seen()).toContain("Saltmarsh 2 / A2 / blue");

    await press("right", "right");
    expect(seen()).toMatch(/silane +812 +814/);
    expect(seen()).toContain("◆ what-if");
    expect(desk.calls.filter((call) => call === "whatIf").length).toBeGreaterThan(0);

    await press("p");
    expect(seen()).toContain("A2: change the settings");
    await press("a", ..."after", "space", ..."the clean", "enter");
    expect(desk.calls).toContain("adopt p-000215 after the clean");
    expect(seen()).toContain("silane   812 -> 835 sccm");

    await press("q");
    expect(seen()).toContain("c-000216 adopted, not entered");
    await press("e", "enter");
    expect(desk.calls.some((call) => call.startsWith("enter"))).toBe(false);
    await press("y");
    expect(desk.calls).toContain("enter c-000216");
    expect(seen()).toContain("c-000216 entered, no run since");

    await press("c");
    expect(seen()).toContain("no run since c-000216 was entered");
    await press("l", ..."2.058", "enter", ..."88.4", "enter", ..."603", "enter");
    expect(desk.calls).toContain("log A2 2.058 88.4 603");
    expect(seen()).toContain("88.4 nm, within noise of what was expected");

    await press("c", "y");
    expect(desk.calls).toContain("close c-000216");
    expect(seen()).toContain("expected 88.1 nm, got 88.4 nm");
    // the verdict once, and the way to take it back
    expect(seen()).toContain("c-000216 is closed: as expected; 1 of 1 measured run in goal.");
    expect(seen().match(/is closed: /g)).toHaveLength(1);
    expect(seen()).toContain("coatwright undo c-000216 --reason TEXT");
    await press("u");
    expect(seen()).toContain("undo works on the chamber screen: q goes back to it, then u");
    await press("q", "q");
    expect(seen()).toContain("FINE: leave it alone");
  });

  test("a proposal that has gone stale says so, and the reason typed is still there", async () => {
    const desk = new FakeDesk();
    const { press, seen, start } = sit(desk);
    await start();
    await press("p");
    await press("a", ..."because");
    desk.failNext = "the book has moved on since p-000215 was made";
    await press("enter");
    expect(seen()).toContain("! the book has moved on since p-000215 was made (ask again with p)");
    expect(seen()).toContain("reason because");
    await press("enter");
    expect(desk.calls).toContain("adopt p-000215 because");
  });

  test("a value that reads back differently is entered as read, checked against the setting's unit and range", async () => {
    const desk = new FakeDesk();
    const { press, seen, start } = sit(desk);
    await start();
    await press("p");
    await press("a", ..."why", "enter");
    // from the line screen, so that the settings have to be fetched
    await press("q", "e", "n");
    expect(seen()).toMatch(/c-000216 is not entered; .*e again/);
    await press("e", "d");
    expect(seen()).toContain("adopted  silane 835 sccm");
    await press(..."8,3", "enter");
    expect(seen()).toContain("comma");
    await press("ctrl-u", ..."20", "enter");
    expect(seen()).toContain("300 sccm to 1200 sccm");
    await press("ctrl-u", ..."834", "enter");
    expect(seen()).toContain("silane 834 sccm instead of 835 sccm");
    await press("enter");
    expect(desk.calls.some((call) => call.startsWith("enter"))).toBe(false);
    await press("d", "down", "down", ..."9.57", "space", ..."min", "enter");
    expect(seen()).toContain("time goes in steps");
    await press("ctrl-u", ..."572", "enter");
    expect(seen()).toContain("time 572 s is what was adopted");
    await press("y");
    expect(desk.calls).toContain("enter c-000216 silane=834");
  });

  test("a run logged while a change waits to be entered says on which settings it is booked", async () => {
    const desk = new FakeDesk();
    const { press, seen, start } = sit(desk);
    await start();
    await press("l");
    expect(seen()).not.toContain("booked");
    await press("escape", "p");
    await press("a", ..."why", "enter");
    await press("q", "l");
    expect(seen().replace(/\s+/g, " ")).toContain(
      "c-000216 is adopted but not entered: this run is booked on the settings before it",
    );
  });

  test("a change is taken back with a reason", async () => {
    const desk = new FakeDesk();
    const { press, seen, start } = sit(desk);
    await start();
    await press("p");
    await press("a", ..."why", "enter");
    await press("q", "u", "enter");
    expect(seen()).toContain("a reason is needed");
    await press(..."wrong boat", "enter");
    expect(desk.calls).toContain("undo c-000216 wrong boat");
  });

  test("a fault of the desk is shown in words and ends nothing", async () => {
    const desk = new FakeDesk();
    desk.whatIf = () => {
      throw new Error("matrix is singular");
    };
    const { press, seen, start, outside } = sit(desk);
    await start();
    await press("enter", "right");
    expect(seen()).toContain("a fault of ours: matrix is singular");
    expect(outside).toEqual([]);
  });

  test("a run is logged straight from the line, with the expectation beside it", async () => {
    const desk = new FakeDesk();
    const { press, seen, start } = sit(desk);
    await start();
    await press("down", "l");
    expect(seen()).toContain("log a run of B1");
    expect(seen()).toMatch(/expected 2\.\d{3} ±0\.013/);
    await press(..."2.05", "tab", "tab", "enter");
    expect(desk.calls).toContain("log B1 2.05 null null");
  });

  test("keys that arrive together ask one what-if question, the newest", async () => {
    const desk = new FakeDesk();
    const { press, seen, start } = sit(desk);
    await start();
    await press("enter");
    const before = desk.calls.filter((call) => call === "whatIf").length;
    await press(...Array.from({ length: 40 }, () => "right"));
    expect(desk.calls.filter((call) => call === "whatIf").length).toBe(before + 1);
    expect(seen()).toMatch(/silane +812 +852/);
  });
});

describe("painting", () => {
  /** A clock that stands still until told. */
  class HandClock implements Clock {
    time = 0;
    private waiting: { at: number; call: () => void }[] = [];
    now() {
      return this.time;
    }
    after(milliseconds: number, call: () => void) {
      this.waiting.push({ at: this.time + milliseconds, call });
    }
    pass(milliseconds: number) {
      const end = this.time + milliseconds;
      for (;;) {
        this.waiting.sort((a, b) => a.at - b.at);
        if (this.waiting.length === 0 || this.waiting[0].at > end) break;
        const next = this.waiting.shift();
        if (next === undefined) break;
        this.time = Math.max(this.time, next.at);
        next.call();
      }
      this.time = end;
    }
  }

  test("happens at once after a pause, and at most thirty times a second under a storm of keys", () => {
    const clock = new HandClock();
    const store = new Store(startState(80, 24), () => {}, clock);
    let paints = 0;
    store.subscribe(() => paints++);
    store.dispatch({ kind: "size", columns: 81, rows: 24 });
    expect(paints).toBe(1);
    for (let i = 0; i < 1000; i++) {
      clock.pass(1);
      store.dispatch({ kind: "size", columns: 80 + (i % 2), rows: 24 });
    }
    clock.pass(100);
    expect(paints).toBeGreaterThan(25);
    expect(paints).toBeLessThanOrEqual(33);
  });
});
