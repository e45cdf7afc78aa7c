/** Files of runs: what is understood, and what becomes of it. What is refused is refused.test.ts. */
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
