/**
 * The shape of the project, read from its own files: which room may import which, what stays pure, how long a file may
 * be, and that nothing written carries a trace of the machine it was written on.
 */
import { describe, expect, it } from "vitest";
import { filesUnder, importsOf, isSource, type SourceFile, target, withoutComments } from "./support/source-tree.ts";

/** From the light upwards; a room imports only rooms before it. */
const ROOMS = ["engine", "calibration", "recipes", "cli"];
const roomOf = (path: string) => ROOMS.indexOf(path.split("/")[0]);

const everything = filesUnder();
const rooms = everything.filter((file) => roomOf(file.path) >= 0 && isSource(file.path));
const sources = everything.filter((file) => isSource(file.path));

/** "file -> module" for every import that a rule forbids. */
function forbidden(
  files: readonly SourceFile[],
  rule: (file: SourceFile, module: string, to: string | null) => boolean,
) {
  return files.flatMap((file) =>
    importsOf(file.text)
      .filter(({ module }) => rule(file, module, target(file.path, module)))
      .map(({ module }) => `${file.path} -> ${module}`),
  );
}

describe("the scan of the sources", () => {
  it("sees every way of importing, and tells types from values", () => {
    const text = [
      'import a from "a";',
      'import type { B } from "b";',
      'import { type C, type D } from "c";',
      'import { type E, f } from "d";',
      "import {\n  g,\n  h,\n} from './e.ts';",
      'import "f";',
      'export * from "g";',
      'export { i } from "h";',
      'const j = await import("i");',
      '// import k from "commented";',
      '/* import l from "commented" */',
      'export const m = "n"; // from "o"',
      'export const p = ["q/**", "*/r"];',
      'const s = await import("j");',
    ].join("\n");
    expect(importsOf(text)).toEqual([
      { module: "a", typeOnly: false },
      { module: "b", typeOnly: true },
      { module: "c", typeOnly: true },
      { module: "d", typeOnly: false },
      { module: "./e.ts", typeOnly: false },
      { module: "f", typeOnly: false },
      { module: "g", typeOnly: false },
      { module: "h", typeOnly: false },
      { module: "i", typeOnly: false },
      { module: "j", typeOnly: false },
    ]);
  });

  it("follows relative imports to their file", () => {
    expect(target("recipes/line/read.ts", "../../engine/index.ts")).toBe("engine/index.ts");
    expect(target("recipes/line/read.ts", "./line.ts")).toBe("recipes/line/line.ts");
    expect(target("recipes/line/read.ts", "zod")).toBeNull();
  });

  it("reads this project and not an empty folder", () => {
    for (const room of ROOMS) expect(rooms.some((file) => file.path.startsWith(`${room}/`))).toBe(true);
    expect(rooms.length).toBeGreaterThan(20);
  });
});

describe("imports between rooms", () => {
  it("go only from cli to recipes to calibration to engine", () => {
    expect(forbidden(rooms, (file, _, to) => to !== null && roomOf(to) > roomOf(file.path))).toEqual([]);
  });

  it("never reach outside the four rooms", () => {
    expect(forbidden(rooms, (_, __, to) => to !== null && roomOf(to) < 0 && to !== "package.json")).toEqual([]);
  });

  it("go only through a room's index.ts", () => {
    const sideDoor = (file: SourceFile, _: string, to: string | null) =>
      to !== null &&
      roomOf(to) >= 0 &&
      roomOf(to) !== roomOf(file.path) &&
      to.split("/").slice(1).join("/") !== "index.ts";
    expect(forbidden(rooms, sideDoor)).toEqual([]);
  });

  it("form no circle of files at run time", () => {
    const next = new Map(
      rooms.map((file) => [
        file.path,
        importsOf(file.text)
          .filter(({ typeOnly }) => !typeOnly)
          .map(({ module }) => target(file.path, module))
          .filter((to) => to !== null),
      ]),
    );
    const done = new Set<string>();
    const circles: string[] = [];
    const walk = (path: string, trail: readonly string[]): void => {
      if (trail.includes(path)) {
        circles.push([...trail.slice(trail.indexOf(path)), path].join(" -> "));
        return;
      }
      if (done.has(path)) return;
      for (const to of next.get(path) ?? []) walk(to, [...trail, path]);
      done.add(path);
    };
    for (const path of next.keys()) walk(path, []);
    expect(circles).toEqual([]);
  });
});

describe("inside the recipes room", () => {
  it("advice never imports the record, so that it can be asked without files", () => {
    const advice = rooms.filter((file) => file.path.startsWith("recipes/advice/"));
    expect(forbidden(advice, (_, __, to) => to?.startsWith("recipes/record/") ?? false)).toEqual([]);
  });

  it("the rehearsal never imports the calibration, so that the model can be wrong about the virtual chamber", () => {
    const rehearsal = rooms.filter((file) => file.path.startsWith("recipes/rehearsal/"));
    expect(rehearsal.length).toBeGreaterThan(0);
    expect(forbidden(rehearsal, (_, __, to) => to?.startsWith("calibration/") ?? false)).toEqual([]);
  });
});

describe("what touches the world", () => {
  const pure = rooms.filter((file) => roomOf(file.path) <= ROOMS.indexOf("calibration"));

  it("is not engine or calibration: they import nothing but themselves", () => {
    expect(forbidden(pure, (_, module) => module.startsWith("node:"))).toEqual([]);
  });

  it.each([
    ["the clock", /\bDate\s*[.(]|\bnew\s+Date\b|\bperformance\s*\./],
    ["unseeded chance", /\bMath\s*\.\s*random\b|\bcrypto\s*\./],
    [
      "the process, the console or the network",
      /\bprocess\s*\.\s*(env|argv|std|exit|cwd|next|hr|on\b|pid|platform)|\bconsole\s*\.|\bglobalThis\b|\bfetch\s*\(/,
    ],
    ["timers", /\bset(Timeout|Interval|Immediate)\s*\(/],
  ])("engine and calibration never use %s", (_, pattern) => {
    expect(pure.filter((file) => pattern.test(withoutComments(file.text))).map((file) => file.path)).toEqual([]);
  });

  it("opens files in cli/ports.ts, cli/main.ts and the crash note alone", () => {
    // crash.ts writes the trace of a program that is already falling over: no port is to be trusted then.
    const allowed = ["cli/ports.ts", "cli/main.ts", "cli/screens/crash.ts"];
    const opens = (file: SourceFile, module: string) =>
      /^(node:)?fs(\/promises)?$/.test(module) && !allowed.includes(file.path);
    expect(forbidden(rooms, opens)).toEqual([]);
  });
});

describe("every file", () => {
  it("of the rooms is at most 400 lines long, tables of materials excepted", () => {
    const long = rooms
      .filter((file) => !file.path.startsWith("engine/materials/data/"))
      .map((file) => [file.path, file.text.trimEnd().split("\n").length] as const)
      .filter(([, lines]) => lines > 400);
    expect(long).toEqual([]);
  });

  it("of program text starts by saying what it is for, tests excepted, whose titles say it", () => {
    const bare = sources
      .filter((file) => !/\.test\.tsx?$/.test(file.path))
      .filter((file) => !/^(#![^\n]*\n)?\s*\/\*\*?\s/.test(file.text));
    expect(bare.map((file) => file.path)).toEqual([]);
  });

  it("is free of the paths of the machine it was written on and of a registry's address", () => {
    // Put together here, so that this file does not find itself.
    const traces = [
      ["/wo", "rk/"],
      ["/ro", "ot/"],
      ["/t", "mp/"],
      ["registry.np", "mjs"],
      ["file:///", "ho"],
    ].map((parts) => parts.join(""));
    const found = everything.flatMap((file) =>
      traces.filter((trace) => file.text.includes(trace)).map((trace) => `${file.path}: ${trace}`),
    );
    expect(found).toEqual([]);
  });

  it("that locks the packages names no download address", () => {
    const lock = everything.find((file) => file.path === "package-lock.json");
    expect(lock?.text).toContain('"lockfileVersion"');
    expect(lock?.text).not.toContain('"resolved"');
  });
});
