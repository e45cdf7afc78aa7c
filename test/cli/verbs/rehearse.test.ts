/** The verb `rehearse`: the scoreboard in words and as JSON, what it refuses, and the replay of a book. */
import { describe, expect, it } from "vitest";
import { argsFromWords } from "../../../cli/args.ts";
import { perform, type World } from "../../../cli/perform.ts";
import { playWorlds } from "../../../cli/rehearse-workers.ts";
import { verbNamed } from "../../../cli/verbs/table.ts";
import { Refusal } from "../../../engine/index.ts";
import { rehearsing, type Workspace } from "../../../recipes/index.ts";
import { demoLine, lineWith, onGoal, play } from "../../support/desk-line.ts";

function worldOf(ws: Workspace): World {
  return {
    ports: ws.ports,
    cwd: "/",
    resolve: () => "/line",
    readFile: () => new Uint8Array(),
    open: new Map([["/line", ws]]),
  };
}

async function say(ws: Workspace, ...words: string[]) {
  const verb = verbNamed("rehearse");
  return perform(verb, argsFromWords(verb, words), worldOf(ws), undefined);
}

const cheap = "proportional,tuned-ewma,oracle";

describe("rehearse", () => {
  it("prints a table a scenario with errors, bars, and what the columns mean", async () => {
    const { text, exit } = await say(
      await demoLine(),
      ...["--scenario", "base,leak", "--worlds", "4", "--seed", "verb", "--practices", cheap, "--workers", "1"],
    );
    expect(exit ?? 0).toBe(0);
    expect(text.replace(/\s+/g, " ")).toContain(
      "base: a new chamber, a new film, three sisters (linear worlds). 4 worlds, seeds verb-1 to verb-4",
    );
    expect(text).toMatch(/^proportional rule +[\d.]+ +[\d.]+±[.\d]+ /m);
    expect(text).toMatch(/^ +oracle \(sees the truth\) +▇* ?[\d.]+ %$/m);
    expect(text).toContain("nobody named the leak");
    expect(text.replace(/\s+/g, " ")).toContain("±: standard error over worlds.");
    for (const line of text.split("\n")) expect(line.length).toBeLessThanOrEqual(80);
  });

  it("gives the same figures as JSON, whatever the order practices are named in", async () => {
    const ws = await demoLine();
    const flags = ["--worlds", "3", "--workers", "1"];
    const one = await say(ws, "--practices", "oracle,proportional", ...flags);
    const other = await say(ws, "--practices", "proportional,oracle", ...flags);
    expect(other.document).toEqual(one.document);
    const [scenario] = one.document["scenarios"] as Record<string, unknown>[];
    expect(scenario).toMatchObject({ scenario: "base", worlds: 3, gap_closed: null });
    const practices = scenario["practices"] as { practice: string; later_in_goal: { value: number } }[];
    expect(practices.map((p) => p.practice)).toEqual(["proportional", "oracle"]);
    expect(practices[1].later_in_goal.value).toBeGreaterThan(practices[0].later_in_goal.value);
  });

  it("refuses what it does not know or cannot do", async () => {
    const ws = await demoLine();
    const code = async (...words: string[]) => {
      try {
        await say(ws, ...words);
      } catch (error) {
        if (error instanceof Refusal) return error.code;
        throw error;
      }
      return "done";
    };
    expect(await code("--scenario", "fog")).toBe("unknown-scenario");
    expect(await code("--practices", "guess")).toBe("unknown-practice");
    expect(await code("--worlds", "0")).toBe("bad-argument");
    expect(await code("--worlds", "2.5")).toBe("bad-argument");
    expect(await code("--scenario", "")).toBe("bad-argument");
    expect(await code("--chamber", "A1")).toBe("bad-argument");
    expect(await code("--replay", "--worlds", "3")).toBe("bad-argument");
    expect(await code("--replay", "--chamber", "B1")).toBe("too-few-runs");
  });

  it("replays the book of a chamber: the verdict, the figures, the latest runs", async () => {
    const ws = lineWith();
    await play(ws, "A2", "verb").run(onGoal, 10);
    const { text, document } = await say(ws, "--replay", "--chamber", "A2");
    expect(text).toMatch(/inside the 95 % interval \d+ of \d+ readings/);
    expect(text).toContain("the EWMA would have");
    const [replay] = document["replays"] as Record<string, unknown>[];
    // No recipe was stated: before the first run there was nothing to foresee it from.
    expect(replay).toMatchObject({ chamber: "A2", measured_runs: 10, replayed: 9, left_out: 1 });
    for (const line of text.split("\n")) expect(line.length).toBeLessThanOrEqual(100);
  });
});

describe("worlds", () => {
  it("come back in the order asked, and are the same played in any order", async () => {
    const desk = await rehearsing();
    const practices = ["proportional", "tuned-ewma", "oracle"];
    const asked = desk.rehearsalOf({ scenarios: ["base", "after-clean"], practices, seed: "order", worlds: 2 });
    const worlds = desk.worldsOf(asked);
    expect(worlds.map((w) => `${w.scenario} ${w.seed}`)).toEqual([
      "base order-1",
      "base order-2",
      "after-clean order-1",
      "after-clean order-2",
    ]);
    const told: number[] = [];
    const played = await playWorlds(worlds, 1, (back) => told.push(back));
    expect(told).toEqual([1, 2, 3, 4]);
    const backwards = [...worlds].reverse().map(desk.playWorld);
    expect(backwards.reverse()).toEqual(played);
    // What a worker sends is a copy: nothing may be lost on the way.
    expect(structuredClone(played)).toEqual(played);
  });

  it("hold one of this program's own, scored like the others", async () => {
    const desk = await rehearsing();
    const [played] = desk.playWorld({ scenario: "out-of-reach", practices: [desk.OURS], seed: "own" });
    expect(played).toMatchObject({ runs: 20, reached: false, later: { made: 0 } });
    expect(played.stated).toHaveLength(20);
    expect(played.advice["out_of_reach"]).toBeGreaterThan(10);
  });
});
