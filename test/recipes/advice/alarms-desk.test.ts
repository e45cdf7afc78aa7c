/** Alarms at the desk: they reach the advice with what the book knows, and a person's word ends them for a while. */
import { describe, expect, it } from "vitest";
import { alarmNames } from "../../../recipes/advice/alarm-checks.ts";
import { decide } from "../../../recipes/advice/decide.ts";
import {
  chamberView,
  correcting,
  overview,
  propose,
  question,
  recordNote,
  recordReading,
  recordRun,
  type Workspace,
} from "../../../recipes/index.ts";
import { aim } from "../../../recipes/rehearsal/aim.ts";
import { virtualChamber } from "../../../recipes/rehearsal/virtual-chamber.ts";
import { calm, lineWith, onGoal, type Played, play, settled } from "../../support/desk-line.ts";

const filmOnly = {
  "  weighted_reflectance: at most 2.5 %\n": "",
  "  reflectance_minimum: 600 nm within 15 nm\n": "",
};
const steady = {
  transient: { index: 0, rate: 0, fade: 3 },
  controllers: { silane: 1, ammonia: 1, nitrogen: 1 },
  index: 0,
  lnRate: 0,
  ignitionS: 4,
};
/** Typeable settings that lay index 2.06 and 88 nm in the steady chamber. */
const exact = aim(
  (s) => virtualChamber(calm, "aim", { given: steady }).expected(s),
  onGoal,
  { index: 2.06, thicknessNm: 88 },
  { bounds: { ratio: [5, 14], timeS: [200, 900] } },
) as ReadonlyMap<string, number>;
const target = new Map(
  [...exact].map(([name, value]) => [name, name === "ammonia" ? 10 * Math.round(value / 10) : Math.round(value)]),
);
const timed = (share: number) => new Map(target).set("time", Math.round((target.get("time") as number) * share));
const ask = async (ws: Workspace, chamber = "A1") =>
  (await propose(ws, { chamber, forMode: null, dryRun: true })).answer;

async function onTarget(seed: string, over: Record<string, string> = {}): Promise<Played> {
  const played = play(lineWith({ ...filmOnly, ...over }), "A1", seed, { given: steady });
  await settled(played, target);
  await played.recipe(target);
  await played.run(target, 3);
  return played;
}

describe("a rate that fell by 12 % at once", () => {
  it("is a fault with the rate's checks, until a person overrules rate_low by name", async () => {
    const played = await onTarget("rate");
    await played.run(target, 2, (r) => ({ ...r, thicknessNm: r.thicknessNm * 0.88 }));
    const answer = await ask(played.ws);
    expect(answer.advice).toBe("fault");
    expect(answer.alarms[0].name).toBe("rate_low");
    expect(answer.because.join(" ")).toMatch(/First checks: Check the generator/);
    expect(answer.because.join(" ")).toMatch(/--override rate_low --runs 5/);
    expect(overview(played.ws).chambers.find((c) => c.chamber === "A1")).toMatchObject({
      attention: "fault",
      alarm: "rate_low",
    });
    expect(chamberView(played.ws, "A1").alarms[0]).toMatch(/^rate_low: /);
    await recordNote(
      played.ws,
      { chamber: "A1", text: "generator checked", override: { alarm: "rate_low", runs: 5 } },
      {},
    );
    expect((await ask(played.ws)).advice).not.toBe("fault");
    expect(chamberView(played.ws, "A1").alarms.join(" ")).not.toMatch(/rate_low/);
  });
});

describe("a slip of units", () => {
  it("stops nothing, and its command sets it right", async () => {
    const played = await onTarget("slip");
    await played.run(target, 1, (r) => ({ ...r, thicknessNm: r.thicknessNm * 10 }));
    const answer = await ask(played.ws);
    expect(answer.advice).toBe("keep");
    const told = answer.alarms.find((a) => a.name === "unit_slip");
    const command = told?.checks.find((c) => c.startsWith("coatwright correct")) ?? "";
    const [, entry, field, value] =
      /^coatwright correct (\d+) (thickness)=([\d.]+nm) --reason TEXT$/.exec(command) ?? [];
    const { correctEntry } = await correcting();
    await correctEntry(played.ws, { entry: Number(entry), given: [[field, value]], reason: "typed in angstrom" });
    const after = await ask(played.ws);
    expect(after.alarms).toEqual([]);
    expect(after.now.film.thicknessNm).toBeGreaterThan(86);
  });

  it("is corrected in the reading that came later, where it was typed", async () => {
    const { ws } = await onTarget("later");
    const run = await recordRun(ws, { chamber: "A1" }, {});
    const later = await recordReading(ws, { run: run.entry as number, index: 2.06, thickness: 881 }, {});
    const told = (await ask(ws)).alarms.find((a) => a.name === "unit_slip");
    expect(told?.entry).toBe(run.entry);
    expect(told?.checks).toContain(`coatwright correct ${later.entry} thickness=88.1nm --reason TEXT`);
  });

  it("is corrected to a cell's reading where the wrong wafer was read", async () => {
    const played = await onTarget("wafer");
    await played.run(target, 1, (r) => ({ index: r.index - 0.04, thicknessNm: r.thicknessNm * 0.85 }));
    const told = (await ask(played.ws)).alarms.find((a) => a.name === "wrong_wafer");
    const command = told?.checks.find((c) => c.includes("on=cell")) ?? "";
    const [, entry] = /coatwright correct (\d+) on=cell/.exec(command) ?? [];
    const { correctEntry } = await correcting();
    await correctEntry(played.ws, { entry: Number(entry), given: [["on", "cell"]], reason: "it was a cell" });
    expect((await ask(played.ws)).alarms).toEqual([]);
  });
});

describe("all chambers off at once", () => {
  it("are the gauge's or the gas supply's fault on each of them, not theirs", async () => {
    const ws = lineWith(filmOnly);
    const chambers: Played[] = [];
    for (const name of ["A1", "A2"]) {
      const played = play(ws, name, `both ${name}`, { given: steady });
      await settled(played, target);
      await played.recipe(target);
      await played.run(target, 3);
      chambers.push(played);
    }
    for (let i = 0; i < 2; i++)
      for (const played of chambers) await played.run(target, 1, (r) => ({ ...r, index: r.index - 0.07 }));
    for (const name of ["A1", "A2"]) {
      const answer = await ask(ws, name);
      expect(answer.advice).toBe("fault");
      expect(answer.alarms.map((a) => a.name)).toEqual(["all_moved"]);
      expect(answer.because.join(" ")).toMatch(/reference wafer/);
    }
  });
});

describe("a recipe past the anchor already", () => {
  const narrow = { "time: 10 %": "time: 3 %\n  silane: 3 %\n  ammonia: 3 %" };

  it("is told of where it is to be kept, and stops where more of the same would be needed", async () => {
    const played = await onTarget("past", narrow);
    const q = question(played.ws, "A1", "blue", null);
    const kept = decide({ ...q, anchor: timed(0.9), anchorEntry: 7 });
    expect(kept.advice).toBe("keep");
    const told = kept.alarms.find((a) => a.name === "past_anchor");
    expect(told).toMatchObject({ calls: "tell", certain: false, entry: 7 });
    expect(told?.sentence).toMatch(
      /the recipe in force has time 1[01]\.\d % above .*\(entry 7\), past the 3 % allowed/,
    );
    const further = { ...q, forMode: "tuning" as const, before: timed(0.94), anchor: timed(0.85), anchorEntry: 7 };
    const stopped = decide(further);
    expect(stopped.advice).toBe("fault");
    expect(stopped.alarms[0]).toMatchObject({ name: "past_anchor", calls: "stop", certain: true });
    expect(stopped.after).toBe(further.before);
    expect(decide({ ...further, overridden: new Set(["past_anchor"]) }).advice).toBe("change");
  });

  it("may be changed back to inside", async () => {
    const played = await onTarget("back", narrow);
    const q = question(played.ws, "A1", "blue", null);
    const answer = decide({ ...q, forMode: "tuning", before: timed(0.94), anchor: target });
    expect(answer.advice).toBe("change");
    expect(answer.alarms.map((a) => [a.name, a.calls])).toEqual([["past_anchor", "tell"]]);
  });
});

describe("a person's override", () => {
  it("is taken for every alarm by its name, ends with its runs or at the next clean, and is refused for no alarm", async () => {
    const { ws } = await onTarget("override");
    const inForce = () => [...question(ws, "A1", "blue", null).overridden].sort();
    const overruleAll = async (runs: number) => {
      for (const alarm of alarmNames)
        await recordNote(ws, { chamber: "A1", text: "looked", override: { alarm, runs } }, {});
    };
    await overruleAll(1);
    expect(inForce()).toEqual([...alarmNames].sort());
    await recordRun(ws, { chamber: "A1", index: 2.06, thickness: 88 }, {});
    expect(inForce()).toEqual([]);
    await overruleAll(5);
    expect(inForce()).toEqual([...alarmNames].sort());
    await ws.book.append({ kind: "clean", data: { chamber: "A1" } });
    expect(inForce()).toEqual([]);
    await expect(
      recordNote(ws, { chamber: "A1", text: "looked", override: { alarm: "rate_odd", runs: 1 } }, {}),
    ).rejects.toMatchObject({ code: "unknown-alarm" });
  });
});
