/** Files that are damaged, hostile or merely odd: each is refused with a place, or read rightly, within a second. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { readYaml } from "../../../recipes/line/yaml.ts";
import { changed, EXAMPLE, lineOf, problemsOf } from "./given.ts";

const deep = (open: string, times: number) => `line: ${open.repeat(times)}`;
const bytes = (...parts: (string | number[])[]) =>
  Uint8Array.from(parts.flatMap((part) => (typeof part === "string" ? [...new TextEncoder().encode(part)] : part)));

const HOSTILE: [what: string, source: string | Uint8Array, code: string][] = [
  ["empty", "", "empty-file"],
  ["only a comment", "# nothing\n", "empty-file"],
  ["only a byte-order mark", "\ufeff", "empty-file"],
  ["a bare word", "hello", "wrong-type"],
  ["a list", "- a\n- b\n", "wrong-type"],
  ["a key its value sticks to", "line:x", "missing-space"],
  ["old Mac line ends", EXAMPLE.replaceAll("\n", "\r"), "line-ends"],
  ["two documents", `${EXAMPLE}---\nline: y\n`, "many-documents"],
  ["a directive", `%YAML 1.1\n---\n${EXAMPLE}`, "directive"],
  ["an alias", changed("  A2: {}", "  A2: *a"), "alias"],
  ["an anchor", changed("  A2: {}", "  A2: &a {}"), "alias"],
  [
    "an alias bomb",
    `a: &a [x,x]\n${[..."bcdefghi"].map((c, i) => `${c}: &${c} [*${"abcdefgh"[i]},*${"abcdefgh"[i]}]`).join("\n")}`,
    "alias",
  ],
  ["a known tag", changed("  A2: {}", "  A2: !!map {}"), "tag"],
  ["an unknown tag", changed("  A2: {}", "  A2: !x {}"), "tag"],
  ["a binary tag", changed("Saltmarsh 2", "!!binary aGk="), "tag"],
  ["a merge key", changed("  A2: {}", "  <<: {}"), "merge-key"],
  ["__proto__ as chamber", changed("  A2: {}", "  __proto__: {}"), "reserved-key"],
  ["constructor as chamber", changed("  A2: {}", "  constructor: {}"), "reserved-key"],
  ["prototype as chamber", changed("  A2: {}", "  prototype: {}"), "reserved-key"],
  ["toString as key", `${EXAMPLE}toString: 1\n`, "unknown-key"],
  ["a duplicate key", `${EXAMPLE}line: again\n`, "duplicate-key"],
  ["a collection as key", `${EXAMPLE}? [a, b]\n: 1\n`, "key-not-text"],
  ["800 brackets", deep("[", 800), "yaml"],
  ["100,000 brackets", deep("[", 100_000), "file-too-large"],
  ["2,000 nested lists", `${"- ".repeat(2000)}a`, "too-deep"],
  ["30 nested maps", `line: ${"{ a: ".repeat(30)}1${" }".repeat(30)}`, "too-deep"],
  ["8,000 keys", Array.from({ length: 8000 }, (_, i) => `k${i}: 1`).join("\n"), "too-many-keys"],
  ["100,000 keys", Array.from({ length: 100_000 }, (_, i) => `k${i}: 1`).join("\n"), "file-too-large"],
  ["2 MB of one value", `line: ${"x".repeat(2_000_000)}`, "file-too-large"],
  [
    "UTF-16",
    bytes(
      [0xff, 0xfe],
      [...EXAMPLE].map((c) => c.charCodeAt(0)).flatMap((c) => [c & 255, c >> 8]),
    ),
    "not-utf8",
  ],
  ["a byte that is not UTF-8", bytes("line: a\ntime_zone: ", [0xc3, 0x28]), "not-utf8"],
  ["NUL in a name", changed("Saltmarsh 2", '"a\\0b"'), "control-character"],
  ["ESC in a name", changed("Saltmarsh 2", '"\\e[31mred"'), "control-character"],
  ["raw ESC in a name", changed("Saltmarsh 2", "\u001b[31mred"), "control-character"],
  ["a number beyond doubles", changed("0.003", "1e400"), "not-a-number"],
  ["not a number", changed("0.003", ".nan"), "not-a-number"],
  ["infinity", changed("0.003", ".inf"), "not-a-number"],
  ["a hexadecimal number", changed("0.003", "0x1F"), "unknown-unit"],
  ["the Norway word", changed("tune: true", "tune: no"), "wrong-type"],
  ["an unclosed quote", changed("Saltmarsh 2", '"Saltmarsh'), "yaml"],
  ["an unclosed brace", changed("A2: {}", "A2: {"), "yaml"],
  ["a reserved character", changed("Saltmarsh 2", "`x"), "yaml"],
  ["two colons", changed("Saltmarsh 2", "Saltmarsh: 2"), "yaml"],
];

describe("a file that is damaged or hostile", () => {
  it.each(HOSTILE)("%s: refused within a second, with a place", (_what, source, code) => {
    const before = performance.now();
    const problems = problemsOf(() => lineOf(source as string));
    expect(performance.now() - before).toBeLessThan(1000);
    expect(problems.map((problem) => problem.code)).toContain(code);
    for (const { row, column, file } of problems) {
      expect(file).toBe("line.yaml");
      expect(row).toBeGreaterThanOrEqual(1);
      expect(column).toBeGreaterThanOrEqual(1);
    }
  });

  it("that nests or lists too much says so at the place", () => {
    expect(problemsOf(() => lineOf(`line: ${"[".repeat(25)}${"]".repeat(25)}`)).map(({ code }) => code)).not.toEqual(
      [],
    );
    const nested = readYaml(`line: ${"[".repeat(25)}${"]".repeat(25)}`, "f");
    expect(nested.problems).toMatchObject([{ code: "too-deep", row: 1, column: 27 }]);
    const wide = readYaml(`a:\n${Array.from({ length: 501 }, (_, i) => `  k${i}: 1`).join("\n")}`, "f");
    expect(wide.problems).toMatchObject([{ code: "too-many-keys", row: 2 }]);
  });

  it("sets no prototype", () => {
    problemsOf(() => lineOf('{"__proto__": {"polluted": true}, "line": "x"}'));
    expect(({} as Record<string, unknown>)["polluted"]).toBeUndefined();
  });

  it("keeps words that YAML 1.1 would have turned into something else, and numbers as they are spelled", () => {
    expect(readYaml("a: no\nb: 012\nc: 1.50\nd: 2024-01-01\ne: true\nf: ~\n", "f").root).toEqual({
      a: "no",
      b: "012",
      c: "1.50",
      d: "2024-01-01",
      e: true,
      f: null,
    });
  });
});

describe("a good file with random damage", () => {
  const damage = fc.record({
    at: fc.nat({ max: EXAMPLE.length }),
    remove: fc.nat({ max: 12 }),
    insert: fc.oneof(
      fc.string({ maxLength: 4 }),
      fc.constantFrom(
        "\t",
        "\n",
        "{",
        "}",
        "[",
        "]",
        ": ",
        ",",
        '"',
        "'",
        "#",
        "-",
        "|",
        ">",
        "&a",
        "*a",
        "!x",
        "\r",
        "0,5",
        "\u00b1",
      ),
    ),
  });

  it("is read or refused, never anything else, and every problem has its row and column inside the file", () => {
    fc.assert(
      fc.property(fc.array(damage, { minLength: 1, maxLength: 3 }), (damages) => {
        let text = EXAMPLE;
        for (const { at, remove, insert } of damages) text = text.slice(0, at) + insert + text.slice(at + remove);
        const rows = text.split(/\r\n|\n|\r/).length;
        for (const { row, column, message } of problemsOf(() => lineOf(text))) {
          expect(message).not.toBe("");
          expect(row).toBeGreaterThanOrEqual(1);
          expect(row).toBeLessThanOrEqual(rows);
          expect(column).toBeGreaterThanOrEqual(1);
        }
      }),
      { numRuns: 150, seed: 20_260_329 },
    );
  });
});
