/** Recipe views: what they say, that the book decides, and that a hand in them is noticed. */
import { describe, expect, it } from "vitest";
import { parse } from "yaml";
import { adoptDraft, enterDraft } from "../../../recipes/record/change-steps.ts";
import { editedViews, viewPath, viewState, viewsOf, writeViews } from "../../../recipes/record/views.ts";
import { Bench, steps } from "../../support/ledger-bench.ts";
import { MemoryFiles, memoryPorts } from "../../support/memory-files.ts";

const FOLDER = "/line";
const PATH = "/line/recipes/blue/A2.yaml";

function entered(): Bench {
  const bench = new Bench();
  bench.recipe(800);
  bench.run(800);
  const proposal = bench.propose(800, 830);
  const change = bench.add(adoptDraft(bench.ledger, { proposal, reason: 'to "goal": now', basis: bench.basis }));
  bench.add(enterDraft(bench.ledger, { change, approvers: [] }));
  return bench;
}

describe("a recipe view", () => {
  it("says what is in force, since when, by whom, from which entry, and what was before", () => {
    const [view] = viewsOf(entered().ledger);
    expect(view.path).toBe("recipes/blue/A2.yaml");
    expect(view.text).toContain("Written by coatwright from book.jsonl");
    // read back by the yaml library: what a person's editor would see
    expect(parse(view.text)).toEqual({
      chamber: "A2",
      recipe: "blue",
      since: "2026-03-01T12:05:00.000Z",
      by: "Ana",
      entry: 4,
      reason: 'to "goal": now',
      settings: { silane: "830 sccm", time: "560 s" },
      before: { since: "2026-03-01T12:01:00.000Z", by: "Ana", entry: 0, changed: { silane: "800 sccm" } },
    });
    expect(view.text).toContain("entered as change c-000003");
  });

  it("holds several steps, and odd names and texts without harm", () => {
    const bench = new Bench();
    const two = [
      { name: "dense", settings: { silane: { value: 900, unit: "sccm" } } },
      { name: "top", settings: { silane: { value: 700, unit: "sccm" } } },
    ];
    bench.add({
      kind: "recipe",
      by: "- x: \u001b[31m",
      data: { chamber: "A2", recipe: "two", steps: two, reason: "a\nb: c # d" },
    });
    const [view] = viewsOf(bench.ledger);
    expect(view.text).not.toMatch(/[\u0000-\u0009\u000b-\u001f]/);
    expect(parse(view.text)).toMatchObject({
      by: "- x: \u001b[31m",
      reason: "a\nb: c # d",
      steps: [
        { name: "dense", settings: { silane: "900 sccm" } },
        { name: "top", settings: { silane: "700 sccm" } },
      ],
    });
  });

  it("is written when missing, written anew when outdated, and left and named when edited by hand", () => {
    const files = new MemoryFiles();
    const ports = memoryPorts(files);
    const bench = new Bench();
    bench.recipe(800);
    const state = () => viewState(FOLDER, ports, bench.ledger, viewsOf(bench.ledger)[0]);
    expect(state()).toBe("missing");
    expect(writeViews(FOLDER, ports, bench.ledger)).toEqual([]);
    expect(state()).toBe("as the book gives it");
    files.put(PATH, files.text(PATH).replaceAll("\n", "\r\n"));
    expect(state()).toBe("as the book gives it");
    bench.recipe(820);
    expect(state()).toBe("outdated");
    writeViews(FOLDER, ports, bench.ledger);
    expect(parse(files.text(PATH)).settings.silane).toBe("820 sccm");
    files.put(PATH, files.text(PATH).replace("820 sccm", "825 sccm"));
    expect(state()).toBe("edited by hand");
    expect(editedViews(FOLDER, ports, bench.ledger).map((view) => view.path)).toEqual(["recipes/blue/A2.yaml"]);
    expect(writeViews(FOLDER, ports, bench.ledger)).toHaveLength(1);
    expect(files.text(PATH)).toContain("825 sccm");
    expect(writeViews(FOLDER, ports, bench.ledger, true)).toEqual([]);
    expect(parse(files.text(PATH)).settings.silane).toBe("820 sccm");
  });

  it.each(["..", "a/b", "a\\b", "", ".hidden", "a".repeat(65), "caf\u00e9"])("refuses %j as part of a path", (name) => {
    expect(() => viewPath("A2", name)).toThrow(/cannot be part of a file name/);
  });

  it("shows the same recipe twice as no change", () => {
    const bench = new Bench();
    bench.recipe(800);
    bench.recipe(800);
    expect(parse(viewsOf(bench.ledger)[0].text).before.changed).toEqual({});
    expect(viewsOf(bench.ledger)[0].text).toContain(String(steps(800)[0].settings["time"].value));
  });
});
