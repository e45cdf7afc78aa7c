/** A book older than the rule for names is still checked: what cannot be a file name is a problem of its own, and has no view. */
import { describe, expect, it } from "vitest";
import { checkLine } from "../../../recipes/index.ts";
import { demoLine } from "../../support/desk-line.ts";

describe("check of a book with a recipe named like a path", () => {
  it("names the entry and goes on to the end", async () => {
    const ws = await demoLine();
    const steps = [{ settings: { silane: { value: 812, unit: "sccm" } } }];
    const [{ seq }] = await ws.book.write(() => [
      { kind: "recipe", data: { chamber: "A2", recipe: "../../etc", steps } },
      { kind: "clean", data: { chamber: "A2" } },
    ]);
    const { problems, warnings, entries } = checkLine(ws);
    expect(problems).toEqual([
      expect.objectContaining({ code: "bad-name", file: "book.jsonl", row: seq + 1, hint: expect.stringMatching(/./) }),
    ]);
    expect(problems[0].message).toContain('"../../etc"');
    expect(warnings.join()).not.toMatch(/edited by hand/);
    expect(entries).toBe(seq + 2);
  });

  it("is good again once the only runs under that name are corrected", async () => {
    const ws = await demoLine();
    const steps = [{ settings: { silane: { value: 812, unit: "sccm" } } }];
    const data = { chamber: "A2", recipe: "a b", settings_from: "given", steps, count: 1, readings: [] };
    const [{ seq }] = await ws.book.write(() => [{ kind: "run", data }]);
    expect(checkLine(ws).problems).toHaveLength(1);
    await ws.book.write(() => [
      { kind: "correct", data: { entry: seq, fields: { recipe: "blue" }, reason: "no name" } },
    ]);
    expect(checkLine(ws).problems).toEqual([]);
  });
});
