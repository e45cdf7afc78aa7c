/** `correct` supersedes what was typed wrongly, takes nothing a recording verb would refuse, and makes an old book usable again. */
import { describe, expect, it } from "vitest";
import { answer } from "../../../cli/converse.ts";
import type { World } from "../../../cli/perform.ts";
import type { Workspace } from "../../../recipes/index.ts";
import type { AnyDraft } from "../../../recipes/record/entries.ts";
import { demoLine } from "../../support/desk-line.ts";

interface Got {
  ok: boolean;
  result: Record<string, unknown>;
  error: { code: string; message: string; hint?: string };
}

async function desk() {
  const ws = await demoLine();
  const world: World = {
    ports: ws.ports,
    cwd: "/",
    resolve: () => "/line",
    readFile: () => new Uint8Array(),
    open: new Map([["/line", ws]]),
  };
  const say = async (verb: string, args: Record<string, unknown>) =>
    (await answer(JSON.stringify({ id: 1, verb, args }), world, undefined)) as unknown as Got;
  const correct = (entry: number | string, fields: Record<string, unknown> | string[]) =>
    say("correct", { entry, fields, reason: "mistyped" });
  return { ws, say, correct };
}

const runOf = (ws: Workspace, entry: number) => {
  const run = ws.ledger.runs.get(entry);
  if (!run) throw new Error(`entry ${entry} is not a run`);
  return run;
};

/** A run with one measurement of each kind, as an older version of the program may have written it. */
const draft = (silane: number): AnyDraft => ({
  kind: "run",
  data: {
    chamber: "A2",
    recipe: "blue",
    settings_from: "given",
    steps: [
      {
        settings: {
          silane: { value: silane, unit: "sccm" },
          ammonia: { value: 6880, unit: "sccm" },
          time: { value: 547, unit: "s" },
          power: { value: 8, unit: "kW" },
        },
      },
    ],
    count: 1,
    readings: [
      { gauge: "ellipsometer", on: "polished", index: 2.05, thickness_nm: 84.6 },
      { gauge: "reflectometer", on: "cell", reflectance_minimum_nm: 582 },
    ],
  },
});

describe("correct", () => {
  it("makes a run heard again that an old book holds with a setting that cannot be", async () => {
    const { ws, say, correct } = await desk();
    const [{ seq }] = await ws.book.write(() => [draft(-5)]);
    const measured = async () => (await say("chamber", { name: "A2" })).result["measured_runs"];
    expect(await measured()).toBe(36); // the demo's own: a logarithm of -5 teaches nothing
    const fixed = await correct(seq, { silane: "835 sccm" });
    expect(fixed.result).toMatchObject({ entry: seq + 1, corrects: seq, rests: [] });
    expect(await measured()).toBe(37);
    expect((await say("propose", { chamber: "A2", dry_run: true })).ok).toBe(true);
    expect(runOf(ws, seq).data.steps[0].settings["silane"]).toEqual({ value: 835, unit: "sccm" });
  });

  it("puts each reading where its like was read, adds a setting left out, and takes values away", async () => {
    const { ws, correct } = await desk();
    const [{ seq }] = await ws.book.write(() => [draft(835)]);
    await correct(seq, ["reflectance_minimum=604nm", "weighted_reflectance=1.9%", "index=2.043", "pressure=213Pa"]);
    const { readings, data } = runOf(ws, seq);
    expect(readings[0]).toMatchObject({ gauge: "ellipsometer", index: 2.043, thickness_nm: 84.6 });
    expect(readings[0]).not.toHaveProperty("reflectance_minimum_nm");
    expect(readings[1]).toMatchObject({
      gauge: "reflectometer",
      reflectance_minimum_nm: 604,
      weighted_reflectance_percent: 1.9,
    });
    expect(data.steps[0].settings["pressure"]).toEqual({ value: 213, unit: "Pa" });
    await correct(`#${seq}`, ["index=-", "thickness=-"]);
    expect(runOf(ws, seq).readings.map((one) => one.gauge)).toEqual(["reflectometer"]);
    await correct(seq, ["index=2.05"]);
    expect(runOf(ws, seq).readings.map((one) => one.index)).toEqual([2.05, undefined]);
  });

  it("corrects chamber, count and time of a run, and what was done at a clean", async () => {
    const { ws, correct } = await desk();
    const [{ seq }] = await ws.book.write(() => [draft(835)]);
    await correct(seq, ["chamber=A1", "count=2", "at=2026-03-20T11:00:00Z"]);
    expect(runOf(ws, seq)).toMatchObject({ chamber: "A1", at: "2026-03-20T11:00:00.000Z", data: { count: 2 } });
    const clean = ws.ledger.entries.find((entry) => entry.kind === "clean");
    expect((await correct(clean?.seq ?? -1, ["what=boats only"])).ok).toBe(true);
  });

  it.each([
    [["index=84.1"], "impossible-value", /thickness/],
    [["index=2,043"], "thousands-comma", /2\.043 with a decimal point, or 2043/],
    [["weighted_reflectance=0.02"], "missing-unit", /%/],
    [["at=2026-03-21T10:00:00Z"], "future-time", /happened/],
    [["count=-"], "bad-argument", /cannot be taken away/],
    [["count=1.5"], "not-a-count", /whole number/],
    [["recipe=../x"], "bad-name", /cannot be a name/],
    [["recipe=blu"], "unknown-recipe", /did you mean blue/],
    [["on=moon"], "bad-argument", /polished or cell/],
    [["gauge=ruler"], "unknown-gauge", /ellipsometer/],
    [["silane=80sccm"], "impossible-setting", /digit dropped/],
    [["silan=800sccm"], "no-such-field", /did you mean silane/],
    [["constructor=3"], "no-such-field", /index=2\.043/],
    [["index=2.04", "index=2.05"], "given-twice", /index/],
    [["on=cell"], "no-such-field", /2 readings/],
  ])("refuses %j, and writes nothing", async (fields, code, says) => {
    const { ws, correct } = await desk();
    const [{ seq }] = await ws.book.write(() => [draft(835)]);
    const { error } = await correct(seq, fields);
    expect(error.code).toBe(code);
    expect(`${error.message} ${error.hint}`).toMatch(says);
    expect(ws.ledger.entries).toHaveLength(seq + 1);
  });

  it.each(["", "1e1", "-3", "x"])("refuses the entry number %j", async (entry) => {
    const { correct } = await desk();
    expect((await correct(entry, ["index=2.05"])).error.code).toBe("no-such-entry");
  });
});
