import { EventEmitter } from "node:events";
import { mkdtempSync, readdirSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import { openScreens } from "../../../cli/screens/open.tsx";
import { FakeDesk } from "../../support/fake-desk.ts";
import { SeenTerminal } from "../../support/headless.ts";

/** A keyboard and a screen in memory, with what a program does to them. */
function console_(columns: number, rows: number) {
  const seen = new SeenTerminal(columns, rows);
  let raw = false;
  let settled = Promise.resolve();
  let bytes = 0;
  let lastWrite = 0;
  let said = "";
  const stdin = Object.assign(new EventEmitter(), {
    isTTY: true,
    setRawMode(on: boolean) {
      raw = on;
      return stdin;
    },
    resume: () => stdin,
    pause: () => stdin,
  });
  const stdout = Object.assign(new EventEmitter(), {
    isTTY: true,
    writable: true,
    columns,
    rows,
    write(text: string) {
      bytes += Buffer.byteLength(text);
      lastWrite = performance.now();
      settled = settled.then(() => seen.write(text));
      return true;
    },
  });
  const rest = async () => {
    // quiet for longer than the pace of painting (33 ms)
    const start = performance.now();
    while (performance.now() - Math.max(start, lastWrite) < 45) await new Promise((resolve) => setTimeout(resolve, 10));
    await settled;
  };
  const type = async (text: string) => {
    stdin.emit("data", Buffer.from(text));
    await rest();
  };
  const opened = (desk: FakeDesk, env: Record<string, string> = {}, more: { ascii?: boolean } = {}) =>
    openScreens(desk, {
      stdin: stdin as unknown as NodeJS.ReadStream,
      stdout: stdout as unknown as NodeJS.WriteStream,
      say: (text) => {
        said += text;
      },
      env: { TERM: "xterm-256color", LANG: "C.UTF-8", ...env },
      ...more,
    });
  return { seen, stdin, stdout, type, rest, opened, raw: () => raw, bytes: () => bytes, said: () => said };
}

/** Calls what the screens registered for a signal, without disturbing the process that runs the tests. */
async function signalled(
  name: "SIGTERM" | "SIGINT" | "SIGHUP" | "SIGCONT" | "uncaughtException",
  before: readonly unknown[],
  argument?: unknown,
): Promise<void> {
  const mine = process.listeners(name as "exit").filter(
    // the layout library listens too, once loaded, under this name
    (listener) => !before.includes(listener) && listener.name !== "listener",
  );
  expect(mine).toHaveLength(1);
  (mine[0] as (argument: unknown) => void)(argument);
}

describe.each([
  [80, 24],
  [120, 40],
])("the screens on a terminal of %i by %i", (columns, rows) => {
  test("open on the alternate screen with raw keys, and give everything back when left", async () => {
    const at = console_(columns, rows);
    await at.seen.write("what stood here before\r\n");
    const code = at.opened(new FakeDesk());
    await at.rest();
    expect(at.seen.alternate).toBe(true);
    expect(at.raw()).toBe(true);
    const lines = at.seen.lines();
    expect(lines[0]).toContain("Saltmarsh 2");
    expect(lines.join("\n")).toContain("▸ A2 blue");
    expect(lines[rows - 1]).toContain("p propose");
    await at.type("Q");
    expect(await code).toBe(0);
    await at.rest();
    expect(at.seen.alternate).toBe(false);
    expect(at.raw()).toBe(false);
    expect(at.seen.lines()[0]).toBe("what stood here before");
  });

  test("follow keys, a split arrow among them, and paint little for one step", async () => {
    const at = console_(columns, rows);
    const code = at.opened(new FakeDesk());
    await at.rest();
    await at.type("\r");
    expect(at.seen.lines()[0]).toContain("/ A2 / blue");
    at.stdin.emit("data", Buffer.from("\u001b"));
    await at.type("[C");
    expect(at.seen.lines().join("\n")).toMatch(/silane +812 +813/);
    const before = at.bytes();
    await at.type("\u001b[C");
    const oneStep = at.bytes() - before;
    await at.type("\u000c");
    const wholeScreen = at.bytes() - before - oneStep;
    // a step moves one setting and what follows from it; the larger part of the screen stands still
    expect(oneStep).toBeGreaterThan(0);
    expect(oneStep).toBeLessThan(wholeScreen / 2);
    await at.type("q");
    expect(at.seen.lines().join("\n")).toContain("▸ A2 blue");
    await at.type("\u0003");
    expect(await code).toBe(0);
  });

  test("redraw in the new size when the terminal is resized, and keep their state", async () => {
    const at = console_(columns, rows);
    const code = at.opened(new FakeDesk());
    await at.rest();
    await at.type("\r\u001b[C");
    for (const [wide, high] of [
      [columns + 30, rows + 10],
      [50, 15],
      [columns, rows],
    ]) {
      at.stdout.columns = wide;
      at.stdout.rows = high;
      at.seen.terminal.resize(wide, high);
      at.stdout.emit("resize");
      await at.rest();
      const text = at.seen.lines().join("\n");
      if (wide < 60) expect(text).toContain("enlarge");
      else expect(text).toMatch(/silane +812 +813/);
      expect(at.seen.lines()[high - 1]).toMatch(wide < 60 ? /^$/ : /q back/);
    }
    await at.type("Q");
    await code;
  });
});

describe("however the screens end, the terminal is given back", () => {
  test.each([
    ["SIGTERM", 143],
    ["SIGINT", 130],
    ["SIGHUP", 129],
  ] as const)("%s ends with code %i", async (name, expected) => {
    const before = process.listeners(name);
    const at = console_(80, 24);
    const code = at.opened(new FakeDesk());
    await at.rest();
    await signalled(name, before);
    expect(await code).toBe(expected);
    await at.rest();
    expect(at.seen.alternate).toBe(false);
    expect(at.raw()).toBe(false);
    expect(process.listeners(name)).toEqual(before);
  });

  test("a fault that nobody caught ends with code 1, its trace in a file, a short word on the normal screen", async () => {
    const folder = mkdtempSync(join(tmpdir(), "crash-"));
    const before = process.listeners("uncaughtException");
    const at = console_(80, 24);
    const code = at.opened(new FakeDesk(), { XDG_STATE_HOME: folder });
    await at.rest();
    await signalled("uncaughtException", before, new Error("the sky fell"));
    expect(await code).toBe(1);
    await at.rest();
    expect(at.seen.alternate).toBe(false);
    expect(at.said()).toMatch(/fault of its own \([0-9a-z]{6}\): the sky fell/);
    const [file] = readdirSync(join(folder, "coatwright"));
    expect(readFileSync(join(folder, "coatwright", file), "utf8")).toContain("Error: the sky fell");
    rmSync(folder, { recursive: true });
  });

  test("a closed pipe ends quietly", async () => {
    const at = console_(80, 24);
    const code = at.opened(new FakeDesk());
    await at.rest();
    at.stdout.emit("error", Object.assign(new Error("write EPIPE"), { code: "EPIPE" }));
    expect(await code).toBe(0);
  });

  test("the end of the keyboard is a hang-up", async () => {
    const at = console_(80, 24);
    const code = at.opened(new FakeDesk());
    await at.rest();
    at.stdin.emit("end");
    expect(await code).toBe(129);
  });
});

describe("what is painted", () => {
  test("has no colour with NO_COLOR, but still says which one is chosen", async () => {
    const at = console_(80, 24);
    const code = at.opened(new FakeDesk(), { NO_COLOR: "1" });
    await at.rest();
    const buffer = at.seen.terminal.buffer.active;
    let inverse = 0;
    for (let row = 0; row < 24; row++)
      for (let column = 0; column < 80; column++) {
        const cell = buffer.getLine(row)?.getCell(column);
        expect(cell?.isFgDefault() && cell.isBgDefault()).toBeTruthy();
        if (cell?.isInverse()) inverse++;
      }
    expect(inverse).toBeGreaterThan(0);
    await at.type("Q");
    await code;
  });

  test("shows the wafer's colour where the terminal has enough of them", async () => {
    const at = console_(80, 24);
    const code = at.opened(new FakeDesk(), { COLORTERM: "truecolor" });
    await at.rest();
    await at.type("\r");
    const buffer = at.seen.terminal.buffer.active;
    const colours = new Set<number>();
    for (let row = 0; row < 24; row++)
      for (let column = 0; column < 80; column++)
        if (buffer.getLine(row)?.getCell(column)?.isBgRGB())
          colours.add(buffer.getLine(row)?.getCell(column)?.getBgColor() ?? 0);
    expect([...colours]).toEqual([0x1b2a6b]);
    await at.type("Q");
    await code;
  });

  test("is ASCII where asked, byte for byte", async () => {
    const at = console_(80, 24);
    const code = at.opened(new FakeDesk(), {}, { ascii: true });
    await at.rest();
    await at.type("\r");
    await at.type("p");
    expect(at.seen.lines().join("")).toMatch(/^[ -~]*$/);
    await at.type("Q");
    await at.type("\u0003");
    await code;
  });
});
