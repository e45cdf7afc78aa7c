/** Files of runs: what is understood, what is refused and how it is named, and that it is all or nothing. */
import { describe, expect, it } from "vitest";
import { Refusal } from "../../../../engine/index.ts";
import { readLine } from "../../../../recipes/line/read-line.ts";
import { DEMO_LINE } from "../../../../recipes/line/template.ts";
import { Book } from "../../../../recipes/record/book.ts";
import type { AnyDraft } from "../../../../recipes/record/entries.ts";
import { type ImportRequest, planImport } from "../../../../recipes/record/import/import.ts";
import { readImportMap } from "../../../../recipes/record/import/map-file.ts";
import { catchUp, emptyLedger, type Ledger, replay } from "../../../../recipes/record/ledger.ts";
import { FOLDER } from "../../../support/book-bench.ts";
import { MemoryFiles, memoryPorts } from "../../../support/memory-files.ts";

const line = readLine(DEMO_LINE, "line.yaml");
const NOW = Date.UTC(2026, 5, 1);
const HEAD = "chamber,at,recipe,silane_sccm,ammonia_sccm,time_s,index,thickness_nm";
const ROW = "A2,2026-03-01T10:00,blue,812,6900,560,2.043,84.1";

function plan(text: string | Uint8Array, more: Partial<ImportRequest> = {}) {
  const bytes = typeof text === "string" ? new TextEncoder().encode(text) : text;
  return planImport({ bytes, file: "old.csv", line, ledger: emptyLedger(), nowMs: NOW, ...more });
}
const mapped = (map: unknown): Partial<ImportRequest> => ({ map: readImportMap(map) });

function problemsOf(text: string | Uint8Array, more: Partial<ImportRequest> = {}) {
  try {
    plan(text, more);
  } catch (error) {
    if (error instanceof Refusal) return error.problems;
    throw error;
  }
  return expect.fail("was not refused");
}
const runs = (entries: readonly AnyDraft[]) => entries.flatMap((one) => (one.kind === "run" ? [one] : []));

describe("an import that is understood", () => {
  it("gives one entry a row, in the line's units, with file and row, opened by an import entry", () => {
    const { entries } = plan(`${HEAD}\n${ROW}\n`);
    expect(entries).toEqual([
      { kind: "import", at: "2026-06-01T00:00:00.000Z", data: { file: "old.csv", entries: 1, skipped: 0 } },
      {
        kind: "run",
        // Lisbon is on UTC in winter
        at: "2026-03-01T10:00:00.000Z",
        data: {
          chamber: "A2",
          recipe: "blue",
          settings_from: "given",
          steps: [
            {
              settings: {
                silane: { value: 812, unit: "sccm" },
                ammonia: { value: 6900, unit: "sccm" },
                time: { value: 560, unit: "s" },
              },
            },
          ],
          count: 1,
          readings: [{ gauge: "ellipsometer", on: "polished", index: 2.043, thickness_nm: 84.1 }],
          imported_from: { file: "old.csv", row: 2 },
        },
      },
    ]);
  });

  it("can be appended as it is and replayed", async () => {
    const files = new MemoryFiles();
    const ports = memoryPorts(files);
    const book = Book.open(FOLDER, ports);
    await book.write(() => plan(`${HEAD}\n${ROW}\n${ROW.replace("10:00", "11:00")}\n`).entries);
    expect(replay(Book.open(FOLDER, ports).entries).runs.size).toBe(2);
  });

  it("takes settings in any unit of their dimension, whatever the capitals", () => {
    const head = "Chamber,AT,recipe,silane_SLM,ammonia_sccm,time_min,power_w,pressure_mTorr,temperature_K";
    const [run] = runs(plan(`${head}\nA2,2026-03-01T10:00Z,blue,0.812,6900,10,8010,1500,723.15\n`).entries);
    const { settings } = run.data.steps[0];
    expect(settings).toMatchObject({
      silane: { value: 812, unit: "sccm" },
      time: { value: 600, unit: "s" },
      power: { value: 8.01, unit: "kW" },
      temperature: { value: 450, unit: "degC" },
    });
    // 1 torr = 101325/760 Pa by definition
    expect(settings["pressure"].value).toBeCloseTo((1.5 * 101325) / 760, 8);
  });

  it.each([
    ["a byte-order mark and CR LF", `\ufeff${HEAD}\r\n${ROW}\r\n`, {}],
    ["semicolons", `${HEAD}\n${ROW}\n`.replaceAll(",", ";"), {}],
    ["tabs", `${HEAD}\n${ROW}\n`.replaceAll(",", "\t"), {}],
    ["lone CR as line end", `${HEAD}\r${ROW}\r`, {}],
    ["quotes", `${HEAD}\n"A2","2026-03-01T10:00","blue","812","6900","560","2.043","84.1"`, {}],
    [
      "a decimal comma that was declared",
      `${HEAD};note\n${ROW};x\n`.replaceAll(",", ";").replace("2.043", "2,043").replace("84.1", "84,1"),
      { decimal: "comma" },
    ],
    ["lines to skip", `exported by hand\n\n${HEAD}\n${ROW}\n`, { skip_lines: 2 }],
    ["empty rows between", `${HEAD}\n\n,,,,,,,\n${ROW}\n\n`, {}],
  ])("reads %s", (_, text, map) => {
    const [run] = runs(plan(text, mapped(map)).entries);
    expect(run.data.readings[0]).toMatchObject({ index: 2.043, thickness_nm: 84.1 });
    expect(run.data.steps[0].settings["silane"]).toEqual({ value: 812, unit: "sccm" });
  });

  it("reads windows-1252 and UTF-16 files", () => {
    const text = `${HEAD},note\n${ROW},Jos\u00e9\n`;
    const latin = Uint8Array.from(Buffer.from(text, "latin1"));
    const [run] = runs(plan(latin, mapped({ encoding: "latin-1" })).entries);
    expect(run.data.note).toBe("Jos\u00e9");
    const wide = Uint8Array.from(Buffer.from(`\ufeff${text}`, "utf16le"));
    expect(runs(plan(wide).entries)[0].data.note).toBe("Jos\u00e9");
    expect(problemsOf(latin)[0]).toMatchObject({ code: "not-utf8", row: 2 });
  });

  it("takes headings through a map, and leaves out what it says", () => {
    const text =
      "Anlage;Zeit;Rezept;SiH4 [sccm];NH3;t;n;d;Schicht\nA2;2026-03-01 10:00;blue;812;6,9;560;2,043;84,1;fr\u00fch\n";
    const map = {
      columns: {
        Anlage: "chamber",
        Zeit: "at",
        Rezept: "recipe",
        "SiH4 [sccm]": "silane_sccm",
        NH3: "ammonia_slm",
        T: "time_s",
        n: "index",
        d: "thickness_nm",
      },
      ignore: ["schicht"],
      decimal: ",",
      separator: "semicolon",
      time_zone: "Europe/Berlin",
    };
    const { entries, ignored } = plan(text, mapped(map));
    expect(ignored).toEqual(["Schicht"]);
    const [run] = runs(entries);
    expect(run.at).toBe("2026-03-01T09:00:00.000Z");
    expect(run.data.steps[0].settings["ammonia"]).toEqual({ value: 6900, unit: "sccm" });
  });

  it("takes cleans, precoats and services, counts, kinds, people and places", () => {
    const text = [
      "chamber,at,event,by,note,count,since_clean,kind,boat,position,silane_sccm,ammonia_sccm,time_s,recipe",
      "A2,2026-03-01T08:00Z,clean,Ben,,,,,,,,,,",
      "A2,2026-03-01T09:00Z,precoat,,,3,,,,,,,,",
      "A2,2026-03-01T10:00Z,service,,new shower head,,,,,,,,,",
      "A2,2026-03-01T11:00Z,,Ana,looks blue,24,37,Production,B7,12,812,6900,560,blue",
    ].join("\n");
    const { entries, chambers } = plan(text);
    expect(entries.slice(1, 4)).toEqual([
      { kind: "clean", at: "2026-03-01T08:00:00.000Z", by: "Ben", data: { chamber: "A2" } },
      { kind: "precoat", at: "2026-03-01T09:00:00.000Z", data: { chamber: "A2", count: 3 } },
      { kind: "service", at: "2026-03-01T10:00:00.000Z", data: { chamber: "A2", what: "new shower head" } },
    ]);
    expect(runs(entries)[0]).toMatchObject({
      by: "Ana",
      data: {
        count: 24,
        since_clean: 37,
        kind: "production",
        boat: "B7",
        position: "12",
        note: "looks blue",
        readings: [],
      },
    });
    expect(chambers).toEqual([
      {
        chamber: "A2",
        runs: 1,
        cleans: 1,
        precoats: 1,
        services: 1,
        from: "2026-03-01T08:00:00.000Z",
        to: "2026-03-01T11:00:00.000Z",
      },
    ]);
  });

  it("puts film and light of one row to the gauges that read them", () => {
    const [run] = runs(plan(`${HEAD},reflectance_minimum_nm,weighted_reflectance_percent\n${ROW},604,2.3\n`).entries);
    expect(run.data.readings).toEqual([
      { gauge: "ellipsometer", on: "polished", index: 2.043, thickness_nm: 84.1 },
      { gauge: "reflectometer", on: "cell", reflectance_minimum_nm: 604, weighted_reflectance_percent: 2.3 },
    ]);
  });

  it("takes a recipe of several steps by step.setting", () => {
    const head =
      "chamber,at,recipe,dense.silane_sccm,dense.ammonia_sccm,dense.time_s,top.silane_sccm,top.ammonia_sccm,top.time_s";
    const [run] = runs(plan(`${head}\nA2,2026-03-01T10:00Z,two,900,6000,100,700,7000,400\n`).entries);
    expect(run.data.steps.map((step) => [step.name, step.settings["time"].value])).toEqual([
      ["dense", 100],
      ["top", 400],
    ]);
  });

  it("takes what the file lacks from the recipe in force then, and says so", () => {
    const files = new MemoryFiles();
    const ledger = emptyLedger();
    const stated: AnyDraft = {
      kind: "recipe",
      at: "2026-02-01T00:00:00.000Z",
      data: {
        chamber: "A2",
        recipe: "blue",
        steps: [
          {
            settings: {
              silane: { value: 800, unit: "sccm" },
              ammonia: { value: 7000, unit: "sccm" },
              time: { value: 550, unit: "s" },
            },
          },
        ],
      },
    };
    return Book.open(FOLDER, memoryPorts(files))
      .append(stated)
      .then(({ entry }) => {
        catchUp(ledger, [entry]);
        const [run] = runs(plan("chamber,at,silane_sccm,index\nA2,2026-03-01T10:00,812,2.04\n", { ledger }).entries);
        expect(run.data).toMatchObject({ recipe: "blue", settings_from: "in force, with silane given" });
        expect(run.data.steps[0].settings).toMatchObject({ silane: { value: 812 }, time: { value: 550 } });
        expect(problemsOf("chamber,at,silane_sccm,index\nA2,2026-01-01T10:00,812,2.04\n", { ledger })[0].code).toBe(
          "missing-setting",
        );
      });
  });

  it("skips what the book or the file has already, and counts it", async () => {
    const text = `${HEAD}\n${ROW}\n${ROW}\n${ROW.replace("84.1", "84.2")}\n`;
    const files = new MemoryFiles();
    const ports = memoryPorts(files);
    const book = Book.open(FOLDER, ports);
    const first = plan(text);
    expect([first.skipped, runs(first.entries).length]).toEqual([1, 2]);
    await book.write(() => first.entries);
    const ledger: Ledger = replay(book.entries);
    const again = plan(text, { ledger });
    expect([again.skipped, again.entries]).toEqual([3, []]);
    const more = plan(`${text}${ROW.replace("10:00", "12:00")}\n`, { ledger });
    expect([more.skipped, runs(more.entries).length]).toEqual([3, 1]);
  });

  it("says what was understood", () => {
    const { text } = plan(`${HEAD}\n${ROW}\n${ROW.replace("A2", "B1").replace("812", "1100")}\n`);
    expect(text.split("\n")).toEqual([
      "old.csv: 2 rows, 2 new entries",
      "  chamber: chamber",
      "  at: at",
      "  recipe: recipe",
      "  silane_sccm: silane, sccm",
      "  ammonia_sccm: ammonia, sccm",
      "  time_s: time, s",
      "  index: index",
      "  thickness_nm: thickness_nm",
      "  A2: 1 run, 2026-03-01T10:00:00.000Z to 2026-03-01T10:00:00.000Z",
      "  B1: 1 run, 2026-03-01T10:00:00.000Z to 2026-03-01T10:00:00.000Z",
      "  not in the file: power, pressure, temperature",
      "  silane on B1 is outside its declared range in one row",
    ]);
  });

  it("reads ten thousand rows in a few seconds at most", () => {
    const rows = Array.from({ length: 10_000 }, (_, i) => {
      const at = new Date(Date.UTC(2025, 0, 1) + i * 3_600_000 * 0.9).toISOString().slice(0, 16);
      return `A2,${at},blue,812,6900,560,2.043,${(80 + (i % 100) / 10).toFixed(1)}`;
    });
    // an hour in Lisbon's autumn comes twice and one in spring never: give the offset as a careful exporter would
    const text = `${HEAD}\n${rows.map((row) => row.replace(/(T\d\d:\d\d)/, "$1Z")).join("\n")}\n`;
    const began = performance.now();
    expect(runs(plan(text).entries)).toHaveLength(10_000);
    // the bound only catches a quadratic step
    expect(performance.now() - began).toBeLessThan(5000);
  });
});

describe("an import that is refused", () => {
  const row = (changes: Record<string, string>): string => {
    const cells = ROW.split(",");
    for (const [name, value] of Object.entries(changes)) cells[HEAD.split(",").indexOf(name)] = value;
    return `${HEAD}\n${ROW}\n${cells.join(",")}\n`;
  };

  it.each([
    ["a decimal comma in quotes", row({ index: '"2,043"' }), { code: "decimal-comma", row: 3, column: 7 }],
    ["a thousands comma in quotes", row({ ammonia_sccm: '"6,900"' }), { code: "decimal-comma", row: 3, column: 5 }],
    ["NaN", row({ index: "NaN" }), { code: "not-a-number", row: 3, column: 7 }],
    ["an infinity", row({ index: "inf" }), { code: "not-a-number", row: 3, column: 7 }],
    ["a number too large for any", row({ index: "1e999" }), { code: "not-a-number", row: 3, column: 7 }],
    ["a hexadecimal number", row({ index: "0x2" }), { code: "not-a-number", row: 3, column: 7 }],
    [
      "a unit in the cell",
      row({ silane_sccm: "812 sccm" }),
      { code: "not-a-number", row: 3, column: 4, hint: "the unit belongs in the heading" },
    ],
    ["an index below any film's", row({ index: "1.29" }), { code: "impossible-value", row: 3, column: 7 }],
    [
      "a thickness in the place of the index",
      row({ index: "84.1" }),
      { code: "impossible-value", hint: "is it the thickness?" },
    ],
    ["a thickness beyond the possible", row({ thickness_nm: "2001" }), { code: "impossible-value", row: 3, column: 8 }],
    ["a negative flow", row({ silane_sccm: "-1" }), { code: "impossible-value", row: 3, column: 4 }],
    ["no time at all", row({ time_s: "0" }), { code: "impossible-value", row: 3, column: 6 }],
    ["a chamber of another line", row({ chamber: "Z9" }), { code: "unknown-chamber", row: 3, column: 1 }],
    ["a chamber in other capitals", row({ chamber: "a2" }), { code: "unknown-chamber", hint: "it is written A2" }],
    ["no chamber", row({ chamber: "" }), { code: "missing-value", row: 3, column: 1 }],
    ["no time", row({ at: "" }), { code: "missing-value", row: 3, column: 2 }],
    ["a time without a date", row({ at: "23:40" }), { code: "not-a-time", row: 3, column: 2 }],
    ["a day that does not exist", row({ at: "2026-02-30T10:00" }), { code: "not-a-time", row: 3, column: 2 }],
    ["an American date", row({ at: "3/1/2026 10:00" }), { code: "not-a-time", row: 3, column: 2 }],
    ["a time that came twice", row({ at: "2025-10-26T01:30" }), { code: "ambiguous-time", row: 3, column: 2 }],
    ["a time that never came", row({ at: "2026-03-29T01:30" }), { code: "missing-time", row: 3, column: 2 }],
    ["a time to come", row({ at: "2026-07-01T10:00" }), { code: "in-the-future", row: 3, column: 2 }],
    ["a setting left out", row({ silane_sccm: "" }), { code: "missing-setting", row: 3 }],
    ["a recipe left out where none is known", row({ recipe: "" }), { code: "missing-recipe", row: 3 }],
    ["a row too short", `${HEAD}\nA2,2026-03-01T10:00\n`, { code: "wrong-length", row: 2 }],
    [
      "a bare decimal comma",
      `${HEAD}\n${ROW.replace("2.043", "2,043")}\n`,
      { code: "wrong-length", row: 2, hint: expect.stringContaining("decimal comma") },
    ],
    ["a quote out of place", `${HEAD}\nA2,"2026`, { code: "not-a-table" }],
    ["an empty file", "", { code: "empty-file" }],
    ["a picture", "\u0089PNG\u0000\u0001", { code: "not-a-table", row: 1 }],
  ])("because of %s, named by row and column", (_, text, problem) => {
    expect(problemsOf(text)[0]).toMatchObject({ file: "old.csv", ...problem });
  });

  it.each([
    ["an unknown column", "speed_of_light", { code: "unknown-column", column: 9 }],
    [
      "a misspelt one, with the right word",
      "thicknes_nm",
      { code: "unknown-column", hint: expect.stringContaining("thickness_nm") },
    ],
    [
      "a setting without a unit",
      "power",
      { code: "missing-unit", column: 9, hint: expect.stringContaining("power_kW") },
    ],
    ["a film value without a unit", "thickness", { code: "missing-unit", column: 9, hint: "write thickness_nm" }],
    ["a unit of another dimension", "power_sccm", { code: "wrong-unit", column: 9 }],
    ["a column that comes twice", "INDEX", { code: "column-twice", column: 9 }],
  ])("because of %s", (_, heading, problem) => {
    expect(problemsOf(`${HEAD},${heading}\n${ROW},1\n`)[0]).toMatchObject({ row: 1, ...problem });
  });

  it.each([
    ["chamber", "at,silane_sccm\n2026-03-01T10:00,812\n"],
    ["at", "chamber,silane_sccm\nA2,812\n"],
  ])("because there is no column %s", (name, text) => {
    expect(problemsOf(text)[0]).toMatchObject({ code: "missing-column", message: expect.stringContaining(name) });
  });

  it("because of a decimal point where a comma was declared", () => {
    const text = `${HEAD}\n${ROW}\n`.replaceAll(",", ";");
    expect(problemsOf(text, mapped({ decimal: "," }))[0]).toMatchObject({ code: "decimal-point", row: 2, column: 7 });
  });

  it("because an event is none, a count is none, or a service says nothing", () => {
    const text =
      "chamber,at,event,count\nA2,2026-03-01T10:00Z,party,\nA2,2026-03-01T10:00Z,precoat,1.5\nA2,2026-03-01T10:00Z,service,\n";
    expect(problemsOf(text).map(({ code, row }) => [code, row])).toEqual([
      ["unknown-word", 2],
      ["not-a-count", 3],
      ["missing-value", 4],
    ]);
  });

  it("because an index was read on a textured cell", () => {
    expect(problemsOf(`${HEAD},on\n${ROW},cell\n`)[0]).toMatchObject({ code: "index-on-texture", row: 2, column: 7 });
  });

  it("names all problems, up to fifty, and counts the rest", () => {
    const bad = `${HEAD}\n${`${ROW.replace("2.043", "NaN").replace("84.1", "-3")}\n`.repeat(40)}`;
    const problems = problemsOf(bad);
    expect(problems).toHaveLength(51);
    expect(problems.slice(0, 3).map(({ row: at, column }) => [at, column])).toEqual([
      [2, 7],
      [2, 8],
      [3, 7],
    ]);
    expect(problems[50]).toMatchObject({ code: "more-problems", message: "and 30 more problems" });
  });

  it("keeps rows right below a quoted cell with line ends in it", () => {
    const text = `${HEAD},note\n${ROW},"two\nlines"\n${ROW.replace("2.043", "x")},\n`;
    expect(problemsOf(text)[0]).toMatchObject({ row: 4, column: 7 });
  });
});

describe("an import map", () => {
  it.each([
    ["an unknown key", { colums: {} }],
    ["a decimal sign that is none", { decimal: "'" }],
    ["a separator that is none", { separator: "pipe" }],
    ["an encoding not known", { encoding: "ebcdic" }],
    ["a zone that is none", { time_zone: "Lisbon" }],
    ["a list", [1]],
    ["a negative count", { skip_lines: -1 }],
  ])("is refused for %s", (_, map) => {
    expect(() => readImportMap(map)).toThrow(Refusal);
  });

  it("is refused when it names a column that the file does not have", () => {
    const text = `${HEAD}\n${ROW}\n`;
    expect(problemsOf(text, mapped({ ignore: ["shift"] }))[0].code).toBe("no-such-heading");
    expect(problemsOf(text, mapped({ columns: { Ofen: "chamber" } }))[0].code).toBe("no-such-heading");
  });
});
