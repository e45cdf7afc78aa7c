import { describe, expect, test } from "vitest";
import { decideLook, type LookQuestion, paint, swatch } from "../../../cli/palette.ts";

const look = (env: Record<string, string>, more: Partial<LookQuestion> = {}) =>
  decideLook({ env: { LANG: "en_GB.UTF-8", TERM: "xterm", ...env }, isTTY: true, ...more });

describe("colour", () => {
  // NO_COLOR: no-color.org ("when present and not an empty string"); FORCE_COLOR: force-color.org
  test.each<[string, Record<string, string>, Partial<LookQuestion>, string]>([
    ["goes to a terminal", {}, {}, "16"],
    ["does not go into a pipe", {}, { isTTY: false }, "none"],
    ["is off with NO_COLOR", { NO_COLOR: "1" }, {}, "none"],
    ["is on with an empty NO_COLOR", { NO_COLOR: "" }, {}, "16"],
    ["is off on a dumb terminal", { TERM: "dumb" }, {}, "none"],
    ["is forced into a pipe by FORCE_COLOR", { FORCE_COLOR: "1" }, { isTTY: false }, "16"],
    ["is off with FORCE_COLOR=0", { FORCE_COLOR: "0" }, {}, "none"],
    ["follows FORCE_COLOR before NO_COLOR", { FORCE_COLOR: "1", NO_COLOR: "1" }, {}, "16"],
    ["follows the flag before everything", { FORCE_COLOR: "1" }, { flag: "never" }, "none"],
    ["follows --color=always into a pipe", { NO_COLOR: "1" }, { flag: "always", isTTY: false }, "16"],
    ["knows 256 colours", { TERM: "xterm-256color" }, {}, "256"],
    ["knows true colour", { COLORTERM: "truecolor" }, {}, "true"],
    ["does not care for CI", { CI: "false" }, {}, "16"],
  ])("%s", (_title, env, more, depth) => {
    expect(look(env, more).colour).toBe(depth);
  });

  test("without colour, text of a colour-only tone is the text itself", () => {
    expect(paint("fine", "good", look({ NO_COLOR: "1" }))).toBe("fine");
    expect(paint("fine", "good", look({}))).toBe("\u001b[36mfine\u001b[0m");
  });

  test("no tone is told by red or green", () => {
    for (const tone of ["good", "watch", "alarm", "now", "after", "goal"] as const)
      expect(paint("x", tone, look({}))).not.toMatch(/\u001b\[[0-9;]*(3[12]|9[12])m/);
  });

  test("the wafer's colour is exact in true colour and the nearest of the cube in 256", () => {
    expect(swatch(" ", "#1b2a6b", look({ COLORTERM: "truecolor" }))).toBe("\u001b[48;2;27;42;107m \u001b[0m");
    // nearest levels of 0, 95, 135, 175, 215, 255: 27 -> 0, 42 -> 0, 107 -> 95: 16 + 0 + 0 + 1
    expect(swatch(" ", "#1b2a6b", look({ TERM: "xterm-256color" }))).toBe("\u001b[48;5;17m \u001b[0m");
    expect(swatch(" ", "#1b2a6b", look({}))).toBe(" ");
    expect(swatch(" ", "not a colour", look({ COLORTERM: "truecolor" }))).toBe(" ");
  });
});

describe("signs", () => {
  test.each<[Record<string, string>, boolean]>([
    [{ LANG: "en_GB.UTF-8" }, false],
    [{ LANG: "en_GB.utf8" }, false],
    [{ LANG: "C" }, true],
    [{ LANG: "en_GB.UTF-8", LC_ALL: "C" }, true],
    [{ LANG: "C", LC_CTYPE: "C.UTF-8" }, false],
  ])("with %j ASCII is %s", (env, ascii) => {
    expect(decideLook({ env, isTTY: true }).ascii).toBe(ascii);
  });

  test("--ascii wins over the locale", () => {
    expect(look({}, { ascii: true }).ascii).toBe(true);
  });
});
