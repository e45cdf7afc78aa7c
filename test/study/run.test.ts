/** The command of the study: what it plays is what the scenarios play here, on whatever workers; wrong asking is refused. */
import { spawnSync } from "node:child_process";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { scenarioNamed } from "./all.ts";
import type { Played } from "./scenario.ts";
import { played, seedsOf } from "./scenario.ts";

const command = join(dirname(fileURLToPath(import.meta.url)), "run.mjs");
const run = (...words: string[]) => spawnSync(process.execPath, [command, ...words], { encoding: "utf8" });

describe("the command", () => {
  it("gives the figures of the worlds of its seeds, played on two workers", () => {
    const { stdout, stderr, status } = run("new.", "--worlds", "3", "--seed", "kept", "--workers", "2", "--json");
    expect([stderr, status]).toEqual(["", 0]);
    const told = JSON.parse(stdout) as { seed: string; worlds: number; scenarios: Played[] };
    const scenario = scenarioNamed("new");
    const seeds = seedsOf("kept", 3);
    const here = played(scenario, seeds, seeds.map(scenario.play), { waysApart: null, msPerWorld: 0 });
    expect([told.seed, told.worlds, told.scenarios.map((s) => s.name)]).toEqual(["kept", 3, ["new"]]);
    expect(told.scenarios[0].seeds).toEqual(here.seeds);
    expect(told.scenarios[0].results).toEqual(here.results);
  });

  it("refuses a number of worlds that is none", () => {
    const zero = run("new.", "--worlds", "0");
    expect(zero.status).toBe(2);
    expect(zero.stderr).toContain("--worlds is 0");
  });
});
