/** Why a chamber misses, asked of a whole line folder: the words, the document, where it may have begun, the refusals. */
import { beforeAll, describe, expect, it } from "vitest";
import { Refusal } from "../../../engine/index.ts";
import { adopt, enter, parseChangeId, parseProposalId, propose, type Why, why } from "../../../recipes/index.ts";
import { lineWith, onGoal, type Played, play, settled, stepsFor } from "../../support/desk-line.ts";

const filmOnly = {
  "  weighted_reflectance: at most 2.5 %\n": "",
  "  reflectance_minimum: 600 nm within 15 nm\n": "",
};
/** No transient, so that swapped controllers are all that happens. */
const steady = {
  transient: { index: 0, rate: 0, fade: 3 },
  controllers: { silane: 1, ammonia: 1, nitrogen: 1 },
  index: 0,
  lnRate: 0,
  ignitionS: 4,
};
const gains = { silane: 1, ammonia: 1, nitrogen: 1 };

async function chamber(seed: string, runs = 40): Promise<Played> {
  const played = play(lineWith(filmOnly), "A1", seed, { given: steady });
  await settled(played, onGoal, runs);
  return played;
}

const latest = (played: Played): number => played.ws.ledger.entries[played.ws.ledger.entries.length - 1].seq;

const code = (ask: () => unknown): string => {
  try {
    ask();
  } catch (error) {
    if (error instanceof Refusal) return error.code;
    throw error;
  }
  return "answered";
};

interface Document {
  verdict: string;
  causes: {
    setting: string | null;
    likely: boolean;
    as_if: { low: number; high: number } | null;
    probability: number;
  }[];
  onset: { entry: number; kind: string; stated: boolean };
  runs: { entry: number }[];
  miss: { thickness_percent: { mean: number; sd: number } };
}

describe("a silane controller that delivers 8 % less from one run to the next", () => {
  let found: Why;
  let first = 0;
  beforeAll(async () => {
    const played = await chamber("swapped");
    // Three cleans show how little this chamber steps: without them a step of 7 % could not be excluded.
    for (let i = 0; i < 3; i++) {
      await played.clean();
      await played.run(onGoal, 8);
    }
    played.virtual.swapControllers({ ...gains, silane: 0.92 });
    first = latest(played) + 1;
    await played.run(onGoal, 6);
    found = why(played.ws, "A1");
  });

  it("is named, in per cent less, with an interval that holds the truth", () => {
    expect(found.sentence).toMatch(/^As if silane delivered \d+\.\d % less \(\d+\.\d-\d+\.\d\)\.$/);
    const document = found.document as unknown as Document;
    expect(document.verdict).toBe("named");
    const [cause, ...others] = document.causes;
    expect(cause).toMatchObject({ setting: "silane", likely: true });
    expect(cause.as_if?.low).toBeLessThan(-8);
    expect(cause.as_if?.high).toBeGreaterThan(-8);
    expect(others.some((other) => other.likely)).toBe(false);
    expect(document.causes.reduce((sum, c) => sum + c.probability, 0)).toBeCloseTo(1, 2);
  });

  it("is told apart by what others cannot explain", () => {
    const refused = found.refused.join("; ");
    expect(refused).toMatch(/ammonia[^;]* cannot explain the rate/);
    expect(refused).toMatch(/time[^;]* cannot explain the index/);
    expect(found.wouldTell).toContain("check the silane flow by its rate of rise in the closed chamber");
  });

  it("is found at the run it began with, with every run since beside what was expected", () => {
    const document = found.document as unknown as Document;
    expect(document.onset).toMatchObject({ kind: "run", stated: false });
    // The likeliest onset may lie a run off: one run's scatter is a fifth of the shift.
    expect(Math.abs(document.onset.entry - first)).toBeLessThanOrEqual(1);
    expect(document.runs.length).toBeGreaterThanOrEqual(5);
    // 8 % less silane lays about 7 % less (rate exponent 0.85 of the virtual chamber's law): 1 - 0.92^0.85 = 6.8 %.
    expect(Math.abs(document.miss.thickness_percent.mean + 6.8)).toBeLessThan(3 * document.miss.thickness_percent.sd);
  });
});

describe("where a miss may have begun", () => {
  it("is the service, which does not excuse a controller", async () => {
    const played = await chamber("serviced");
    // Play writes an entry an hour from 400 hours before this on.
    const hours = played.ws.ledger.entries.length + 0.5;
    const at = new Date(Date.UTC(2026, 2, 20, 12) + (hours - 400) * 3_600_000).toISOString();
    await played.ws.book.append({ kind: "service", at, data: { chamber: "A1", what: "silane controller swapped" } });
    const service = latest(played);
    expect(code(() => why(played.ws, "A1"))).toBe("no-run-since");
    played.virtual.swapControllers({ ...gains, silane: 0.93 });
    await played.run(onGoal, 4);
    const { document } = why(played.ws, "A1", String(service));
    const { onset, causes } = document as unknown as Document;
    expect(onset).toMatchObject({ entry: service, kind: "service", stated: true });
    expect(causes.find((c) => c.setting === "silane")?.likely).toBe(true);
    // Held against the chamber as it was: a service's own sd of 4 % (priors.ts) would hide any controller.
    expect((document as unknown as Document).miss.thickness_percent.sd).toBeLessThan(2);
  });

  it("is a change that was entered, by its name, and refused before it was", async () => {
    const played = await chamber("since", 12);
    // A goal this recipe does not lay: there is something to propose.
    const thin = new Map(onGoal).set("time", 600);
    await played.recipe(thin);
    await played.run(thin, 3);
    const { proposal } = await propose(played.ws, { chamber: "A1", forMode: "tuning", dryRun: false });
    const opened = await adopt(played.ws, {
      proposal: parseProposalId(proposal ?? ""),
      reason: "thin",
      entered: false,
      by: "Ana",
    });
    expect(code(() => why(played.ws, "A1", opened.change))).toBe("not-entered");
    await enter(played.ws, { change: parseChangeId(opened.change), readBack: stepsFor(onGoal), by: "Ana" });
    const entered = latest(played);
    expect(code(() => why(played.ws, "A1", opened.change))).toBe("no-run-since");
    await played.run(onGoal, 2);
    const { document } = why(played.ws, "A1", opened.change);
    expect((document as unknown as Document).onset).toMatchObject({ entry: entered, kind: "change", stated: true });
    expect((document as unknown as Document).runs).toHaveLength(2);
  });

  it("is refused for what is no entry, and for an entry after the last run", async () => {
    const played = await chamber("refused", 10);
    expect(code(() => why(played.ws, "A1", "yesterday"))).toBe("bad-entry");
    expect(code(() => why(played.ws, "A1", "9999"))).toBe("no-run-since");
    expect(code(() => why(played.ws, "A9"))).toBe("unknown-chamber");
    await played.clean();
    expect(code(() => why(played.ws, "A1"))).toBe("no-run-since");
  });
});

describe("a chamber with nothing wrong", () => {
  it("has no miss worth explaining, and is told how much would not show", async () => {
    const played = await chamber("fine");
    await played.run(onGoal, 3);
    const { sentence, document } = why(played.ws, "A1", String(latest(played) - 2));
    expect((document as unknown as Document).verdict).toBe("nothing");
    expect(sentence).toMatch(/^No miss worth explaining: it is within scatter\./);
    expect(sentence).toMatch(/So much would not show: .*ammonia -\d+\.\d to \+\d+\.\d %/);
  });
});
