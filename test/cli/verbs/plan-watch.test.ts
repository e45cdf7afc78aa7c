/** The verbs `plan` and `watch` as a person and a script meet them: 80 columns, documents, refusals. */
import { beforeAll, describe, expect, it } from "vitest";
import { argsFromWords } from "../../../cli/args.ts";
import { answer } from "../../../cli/converse.ts";
import type { World } from "../../../cli/perform.ts";
import { cells } from "../../../cli/text/width.ts";
import { findVerb } from "../../../cli/verbs/table.ts";
import type { Call, Outcome } from "../../../cli/verbs/verb.ts";
import type { Workspace } from "../../../recipes/index.ts";
import { demoLine } from "../../support/desk-line.ts";

let ws: Workspace;
beforeAll(async () => {
  ws = await demoLine();
});

/** What a verb answers to words typed after the program's name. */
async function typed(words: string): Promise<Outcome> {
  const { verb, rest } = findVerb(words.split(" "));
  const call = { args: argsFromWords(verb, rest), ports: ws.ports, workspace: () => ws } as unknown as Call;
  return verb.run(call);
}

const widest = (text: string) => Math.max(...text.split("\n").map(cells));

describe("plan", () => {
  it("lays out a run by its number, its moves, what it is for and the goal after it, in 80 columns", async () => {
    const { text, document } = await typed("plan --chamber B1 --runs 3");
    expect(widest(text)).toBeLessThanOrEqual(80);
    const runs = document["runs"] as { moves: string[]; at_goal: { index: { low: number; high: number } } }[];
    expect(runs).toHaveLength(3);
    expect(text).toMatch(/^ {2}1 {2}\S/m);
    expect(text).toMatch(/^ {2}3 {2}\S/m);
    expect(text.match(/then, one run at the goal: index/g)).toHaveLength(3);
    expect(text).toContain("cautions");
    for (const run of runs) expect(run.at_goal.index.low).toBeLessThan(run.at_goal.index.high);
  });

  it("takes levers by name, and stays within 80 columns with all of them", async () => {
    const { text, document } = await typed(
      "plan --chamber A1 --runs 3 --levers silane,ammonia,time,power,pressure,temperature",
    );
    expect(document["levers"]).toHaveLength(6);
    expect(widest(text)).toBeLessThanOrEqual(80);
  });

  it("refuses a count that is none", async () => {
    await expect(typed("plan --chamber A1 --runs four")).rejects.toThrow(/not "four"/);
    await expect(typed("plan --chamber A1 --runs 40")).rejects.toThrow(/1 to 12 runs/);
    await expect(typed("plan --chamber A1")).rejects.toThrow(/needs --runs/);
  });
});

describe("watch", () => {
  it("gives a block a chamber, side by side and the promise of false alarms, in 80 columns", async () => {
    const { text, exit } = await typed("watch");
    expect(widest(text)).toBeLessThanOrEqual(80);
    expect(exit ?? 0).toBe(0);
    expect(text.split("\n")[0]).toBe("A2, recipe blue, 4 depositions since the clean: OUT OF GOAL, ask for a proposal");
    for (const chamber of ["A2", "B1", "A1"]) expect(text).toMatch(new RegExp(`^${chamber}, recipe blue, `, "m"));
    expect(text).toContain("side by side under blue");
    expect(text).toMatch(/slow_shift alarm comes \d\.\d\d times a month/);
  });

  it("is the same document over JSON lines", async () => {
    const world: World = {
      ports: ws.ports,
      cwd: "/",
      resolve: () => "/line",
      readFile: () => new Uint8Array(),
      open: new Map([["/line", ws]]),
    };
    const got = (await answer(JSON.stringify({ id: 1, verb: "watch", args: {} }), world, undefined)) as unknown as {
      ok: boolean;
      result: Record<string, unknown>;
    };
    expect(got.ok).toBe(true);
    const { schema, ...document } = got.result;
    expect(schema).toBe(1);
    expect(document).toEqual((await typed("watch")).document);
    const planned = (await answer(
      JSON.stringify({ id: 2, verb: "plan", args: { chamber: "B1", runs: 2 } }),
      world,
      undefined,
    )) as unknown as { ok: boolean; result: { runs: unknown[] } };
    expect(planned.ok).toBe(true);
    expect(planned.result.runs).toHaveLength(2);
  });
});
