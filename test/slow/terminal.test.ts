/**
 * The screens in a real terminal: a pseudo-terminal made by util-linux `script`, keys typed into it, what comes out drawn
 * by @xterm/headless. Skipped, visibly, where there is no `script`.
 */
import { type ChildProcess, spawn, spawnSync } from "node:child_process";
import { join } from "node:path";
import xterm from "@xterm/headless";
import { afterAll, afterEach, beforeAll, describe, expect, it } from "vitest";
import { type Program, program } from "../support/program.ts";

const canScript = spawnSync("script", ["--version"]).status === 0;
let cw: Program;
const children: ChildProcess[] = [];
afterEach(() => {
  for (const child of children.splice(0)) if (child.exitCode === null) child.kill("SIGKILL");
});
beforeAll(async () => {
  cw = await program();
  expect(cw.run(["new", "line", "--demo"]).status).toBe(0);
}, 60_000);
afterAll(() => cw.remove());

interface Session {
  child: ChildProcess;
  terminal: InstanceType<typeof xterm.Terminal>;
  screen(): string;
  type(keys: string): void;
  until(what: RegExp, seconds?: number): Promise<void>;
  ended: Promise<number | null>;
}

function open(columns: number, rows: number, env: Record<string, string> = {}): Session {
  const command = `stty rows ${rows} cols ${columns}; exec ${process.execPath} ${join(cw.folder, "dist", "coatwright.mjs")} --line ${join(cw.folder, "line")}`;
  const child = spawn("script", ["-qefc", command, "/dev/null"], {
    env: { ...process.env, TERM: "xterm-256color", LANG: "C.UTF-8", COATWRIGHT_BY: "Ana", ...env },
    stdio: ["pipe", "pipe", "inherit"],
  });
  children.push(child);
  const terminal = new xterm.Terminal({ cols: columns, rows, allowProposedApi: true });
  child.stdout?.on("data", (bytes: Buffer) => terminal.write(bytes));
  const screen = () => {
    const buffer = terminal.buffer.active;
    return Array.from({ length: rows }, (_, y) => buffer.getLine(buffer.baseY + y)?.translateToString(true) ?? "").join(
      "\n",
    );
  };
  return {
    child,
    terminal,
    screen,
    type: (keys) => child.stdin?.write(keys),
    async until(what, seconds = 20) {
      const deadline = Date.now() + 1000 * seconds;
      while (!what.test(screen())) {
        if (Date.now() > deadline) throw new Error(`never showed ${what}:\n${screen()}`);
        await new Promise((done) => setTimeout(done, 50));
      }
    },
    ended: new Promise((done) => child.on("exit", (status) => done(status))),
  };
}

describe.skipIf(!canScript)("the screens in a real terminal", () => {
  for (const [columns, rows] of [
    [80, 24],
    [120, 40],
  ] as const) {
    it(`find A2, ask and go back at ${columns} x ${rows}, and leave the terminal as it was`, async () => {
      const s = open(columns, rows);
      await s.until(/A2/);
      expect(s.terminal.buffer.active.type).toBe("alternate");
      s.type("/A2\r");
      await s.until(/A2 .*blue/);
      s.type("\r");
      await s.until(/expected/);
      s.type("p");
      await s.until(/kept as p-/);
      s.type("q");
      await s.until(/expected/);
      s.type("Q");
      expect(await s.ended).toBe(0);
      expect(s.terminal.buffer.active.type).toBe("normal");
    });
  }

  it("tell the whole story: ask, adopt with a reason, enter, log the run, close", async () => {
    const s = open(100, 30);
    const steps: [string, RegExp][] = [
      ["/A2\r", /A2 .*blue/],
      ["\r", /expected/],
      ["p", /kept as p-/],
      ["a", /why|reason/i],
      ["thin since the clean\r", /type in at A2/],
      ["e", /y, d or n/],
      ["y", /in force/],
      ["l", /index/],
      ["2.057\r88.2\r\r", /recorded #/],
      ["c", /y or n/],
      ["y", /is closed: as expected/],
    ];
    await s.until(/A2/);
    for (const [keys, shows] of steps) {
      s.type(keys);
      await s.until(shows);
    }
    s.type("qQ");
    expect(await s.ended).toBe(0);
    const report = cw.run(["report", "--line", "line"]).stdout;
    expect(report).toMatch(/\(closed\)/);
    expect(report).toMatch(/thin since the clean/);
  });

  it("give the terminal back when told to stop", async () => {
    const s = open(80, 24);
    await s.until(/A2/);
    const { stdout } = spawnSync("pgrep", ["-P", String(s.child.pid)], { encoding: "utf8" });
    spawnSync("kill", ["-TERM", stdout.trim().split("\n")[0]]);
    expect(await s.ended).toBe(143);
    expect(s.terminal.buffer.active.type).toBe("normal");
  });

  it("come down to a message in a window too small, and leave it on q", async () => {
    const s = open(50, 12);
    await s.until(/enlarge|larger|small/i);
    s.type("Q");
    expect(await s.ended).toBe(0);
    expect(s.terminal.buffer.active.type).toBe("normal");
  });

  it("show no colour under NO_COLOR and nothing beyond ASCII where the locale is not UTF-8", async () => {
    let bytes = "";
    const s = open(80, 24, { NO_COLOR: "1", LANG: "C", LC_ALL: "C" });
    s.child.stdout?.on("data", (b: Buffer) => {
      bytes += b.toString("latin1");
    });
    await s.until(/A2/);
    s.type("\r");
    await s.until(/expected/);
    s.type("Q");
    await s.ended;
    // Colour is a sequence ending in m with 3x, 4x, 9x or 10x; cursor moves and erasing are no colour.
    expect(bytes).not.toMatch(new RegExp(`${String.fromCharCode(27)}\\[[0-9;]*(3|4|9|10)[0-9][0-9;]*m`));
    expect([...bytes].every((c) => c.charCodeAt(0) < 0x80)).toBe(true);
  });
});
