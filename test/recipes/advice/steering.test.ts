import { describe, expect, it } from "vitest";
import { readSteering, steeredLevers, unsteered } from "../../../recipes/advice/steering.ts";
import { adopt, propose } from "../../../recipes/index.ts";
import { lineWith, play, settled } from "../../support/desk-line.ts";
import { refusalCode } from "../../support/refusal.ts";

const START = new Map([
  ["silane", 800],
  ["ammonia", 6950],
  ["time", 640],
  ["power", 8000],
  ["pressure", 213],
  ["temperature", 450],
]);
/** A chamber off its goal in index and thickness, with a sister that is known. */
async function offGoal() {
  const ws = lineWith({
    "  weighted_reflectance: at most 2.5 %\n": "",
    "  reflectance_minimum: 600 nm within 15 nm\n": "",
    "ammonia/silane: 6 %": "ammonia/silane: 60 %",
    "time: 10 %": "time: 60 %",
  });
  await settled(play(ws, "A1", "steering A1"), START, 14);
  const b = play(ws, "B1", "steering B1");
  const off = new Map(START).set("silane", 770).set("time", 600);
  await b.recipe(off);
  for (let i = 0; i < 4; i++) await b.run(off);
  return { ws, off };
}

describe("a steered proposal", () => {
  it("moves only what it may, no further than it may, and says so in the proposal", async () => {
    const { ws, off } = await offGoal();
    const ask = async (steered: object) => propose(ws, { chamber: "B1", forMode: null, dryRun: true, steered });
    const free = (await ask({})).answer.after;
    const moved = (after: ReadonlyMap<string, number>) =>
      [...after].filter(([name, v]) => off.get(name) !== v).map(([n]) => n);
    expect(moved(free).length).toBeGreaterThan(1);
    const timed = await ask({ only: "time" });
    expect(moved(timed.answer.after)).toEqual(["time"]);
    expect(timed.document["steered"]).toBe("only time");
    expect(timed.answer.because.join(" ")).toContain("As you steered it (only time).");
    const held = await ask({ fix: "silane" });
    expect(moved(held.answer.after)).not.toContain("silane");
    const near = await ask({ limitMove: "1%" });
    for (const [name, value] of near.answer.after)
      expect(Math.abs(value - (off.get(name) as number))).toBeLessThanOrEqual(0.01 * (off.get(name) as number) + 1e-9);
    const seconds = await ask({ limitMove: "time=5s" });
    expect(Math.abs((seconds.answer.after.get("time") as number) - 600)).toBeLessThanOrEqual(5);
  });

  it("is another proposal than the free one, and is adopted on its own basis", async () => {
    const { ws } = await offGoal();
    const free = await propose(ws, { chamber: "B1", forMode: null, dryRun: false });
    const steered = await propose(ws, { chamber: "B1", forMode: null, dryRun: false, steered: { only: "time" } });
    expect(steered.proposal).not.toBe(free.proposal);
    const again = await propose(ws, { chamber: "B1", forMode: null, dryRun: false, steered: { only: "time" } });
    expect(again.proposal).toBe(steered.proposal);
    expect(again.repeated).toBe(true);
    const change = await adopt(ws, {
      proposal: Number(steered.proposal?.slice(2)),
      reason: "time only",
      entered: false,
    });
    expect(change.sheet.filter((row) => row.includes("(was"))).toHaveLength(1);
  });

  it("refuses what is no setting, is not tuned, or is no limit", async () => {
    const { ws } = await offGoal();
    const chamber = ws.chamber("B1");
    const code = (given: object) => refusalCode(() => readSteering(chamber, given));
    expect(code({ only: "tiem" })).toBe("unknown-setting");
    expect(code({ only: "power" })).toBe("not-tuned");
    expect(readSteering(chamber, { fix: "power" }).fixed).toEqual(["power"]);
    expect(code({ limitMove: "0%" })).toBe("bad-limit");
    expect(code({ limitMove: "300%" })).toBe("bad-limit");
    expect(code({ limitMove: "time=-3s" })).toBe("bad-limit");
    expect(code({ limitMove: "time=3s=4" })).toBe("bad-limit");
    expect(readSteering(chamber, {})).toEqual(unsteered);
  });

  it("where no index is asked for, is told what optics alone would choose and what staying costs", async () => {
    const ws = lineWith({
      "  index: 2.06 within 0.02\n": "",
      "ammonia/silane: 6 %": "ammonia/silane: 60 %",
      "time: 10 %": "time: 60 %",
    });
    const a = play(ws, "A1", "no index");
    await settled(a, START, 6);
    const { answer } = await propose(ws, { chamber: "A1", forMode: null, dryRun: true });
    const sentence = answer.because.at(-1) ?? "";
    expect(sentence).toMatch(
      /^No index is asked for.*Optics alone would choose index (1\.9|2\.)\d+ and \d+ nm.*costs \d\.\d\d mA\/cm2\.$/,
    );
    const asked = await offGoal();
    const usual = await propose(asked.ws, { chamber: "B1", forMode: null, dryRun: true });
    expect(usual.answer.because.join(" ")).not.toContain("Optics alone");
  });

  it("with everything held leaves no lever", async () => {
    const { ws, off } = await offGoal();
    const steering = readSteering(ws.chamber("B1"), { fix: "silane,ammonia,time" });
    expect(steeredLevers(ws.chamber("B1"), off, steering)).toEqual([]);
    const { answer } = await propose(ws, {
      chamber: "B1",
      forMode: null,
      dryRun: true,
      steered: { fix: "silane, ammonia, time" },
    });
    expect(answer.after).toEqual(off);
  });
});
