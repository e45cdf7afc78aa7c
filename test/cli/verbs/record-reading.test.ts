/** `record reading` and `record gauge`, as JSON lines and as typed; everything they refuse, and what they mark. */
import { describe, expect, it } from "vitest";
import { argsFromWords } from "../../../cli/args.ts";
import { answer } from "../../../cli/converse.ts";
import { perform, type World } from "../../../cli/perform.ts";
import { findVerb } from "../../../cli/verbs/table.ts";
import { Refusal } from "../../../engine/index.ts";
import { chamberView, LINE_FILE } from "../../../recipes/index.ts";
import { runsOf } from "../../../recipes/record/timeline.ts";
import { lineWith, onGoal, play, settled } from "../../support/desk-line.ts";

interface Got {
  ok: boolean;
  result: Record<string, unknown>;
  error: { code: string; message: string; hint?: string };
}

const files: Record<string, string> = {
  "sites.csv": "position,site,index,thickness_nm\n1,a,2.041,84.0\n1,b,2.045,84.4\n",
  "curve.csv": "wavelength_nm,reflectance\n400,0.21\n600,0.01\n800,0.12\n",
  "percent.csv": "wavelength_nm,reflectance\n400,21\n600,1\n",
};

async function desk() {
  const ws = lineWith();
  const line_file = new TextDecoder().decode(ws.readBeside(LINE_FILE));
  await ws.book.append({ kind: "line", data: { line: ws.line.name, created_by: "a test", line_file } });
  for (const [day, index] of [2.015, 2.013, 2.01, 2.014].entries())
    await ws.book.append({
      kind: "gauge",
      at: new Date(ws.ports.now() - (28 - 7 * day) * 86_400_000).toISOString(),
      data: { gauge: "ellipsometer", reference: true, index, thickness_nm: 79.4 },
    });
  const played = play(ws, "A2", "late readings");
  await settled(played, onGoal, 5);
  await played.clean();
  await played.run(onGoal, 2);
  await settled(play(ws, "A1", "a sister"), onGoal, 4);
  const world: World = {
    ports: ws.ports,
    cwd: "/",
    resolve: () => "/line",
    readFile: (path) => new TextEncoder().encode(files[path] ?? ""),
    open: new Map([["/line", ws]]),
  };
  const say = async (verb: string, args: Record<string, unknown>) =>
    (await answer(JSON.stringify({ id: 1, verb, args }), world, undefined)) as unknown as Got;
  /** As typed; the refusal where there is one. */
  const typed = async (words: string[]) => {
    try {
      const { verb, rest } = findVerb(words);
      return await perform(verb, argsFromWords(verb, rest), world, undefined);
    } catch (error) {
      if (error instanceof Refusal) return error;
      throw error;
    }
  };
  const runs = runsOf(ws.ledger.chambers.get("A2")?.timeline ?? []);
  return { ws, say, typed, last: runs[runs.length - 1], runs };
}

describe("record reading", () => {
  it("joins its run, counts as the mean with what was read before, and changes what the model has learned", async () => {
    const { ws, say, last } = await desk();
    const before = ws.filmOf(last);
    const done = await say("record reading", { run: last.seq, thickness: "99 nm" });
    expect(done.ok).toBe(true);
    expect(done.result["entry"]).toBe(ws.ledger.entries.length - 1);
    expect(ws.ledger.entries.at(-1)).toMatchObject({
      kind: "reading",
      data: { run: last.seq, reading: { gauge: "ellipsometer", on: "polished", thickness_nm: 99 } },
    });
    const run = ws.ledger.runs.get(last.seq);
    const nm = ws.filmOf(run ?? last)?.thicknessNm ?? 0;
    // Half of what the gauge is taken to read too high on that day stays with the first.
    expect(Math.abs(nm - ((before?.thicknessNm ?? 0) + 99) / 2)).toBeLessThan(0.2);
    expect(String(done.result["said"])).toContain("(mean of 2 readings)");
  });

  it("the same typed, with a number sign, a time and a note; nothing is written on a dry run", async () => {
    const { ws, typed, last } = await desk();
    const { length } = ws.ledger.entries;
    const words = ["record", "reading", "--run", `#${last.seq}`, "--index", "2.05", "--note", "second spot"];
    const dry = await typed([...words, "--dry-run"]);
    expect(dry).toMatchObject({ document: { would_record: [{ kind: "reading" }] } });
    expect((dry as { text: string }).text).toContain(`Run ${last.seq} of A2: index`);
    expect(ws.ledger.entries).toHaveLength(length);
    await typed(words);
    expect(ws.ledger.entries.at(-1)?.data).toMatchObject({ note: "second spot" });
  });

  it("of film and light are two entries, written together", async () => {
    const { ws, say, last } = await desk();
    const { length } = ws.ledger.entries;
    const done = await say("record reading", { run: last.seq, index: 2.05, reflectance_minimum: "603 nm" });
    expect(done.result).toMatchObject({ entry: length + 1, entries: [length, length + 1] });
    expect(ws.ledger.runs.get(last.seq)?.later).toHaveLength(2);
  });

  it("takes sites, and a spectrum that is copied before the entry names it", async () => {
    const { ws, say, last } = await desk();
    await say("record reading", { run: last.seq, sites: "sites.csv", spectrum: "curve.csv" });
    const [film, light] = ws.ledger.runs.get(last.seq)?.later.map(({ reading }) => reading) ?? [];
    expect(film).toMatchObject({ index: expect.closeTo(2.043, 9), thickness_nm: expect.closeTo(84.2, 9), sites: 2 });
    expect(light.spectrum).toMatch(/^[0-9a-f]{64}\.csv$/);
    expect(new TextDecoder().decode(ws.readBeside(`spectra/${light.spectrum}`))).toBe(files["curve.csv"]);
  });

  it("at the time it was made may be as early as its run, and no earlier", async () => {
    const { say, last } = await desk();
    const early = new Date(last.atMs - 60_000).toISOString();
    const refused = await say("record reading", { run: last.seq, index: 2.05, at: early });
    expect(refused.error).toMatchObject({ code: "reading-before-run", hint: expect.stringContaining("--at") });
    expect((await say("record reading", { run: last.seq, index: 2.05, at: last.at })).ok).toBe(true);
  });

  it("entered twice says so", async () => {
    const { typed, last } = await desk();
    const words = ["record", "reading", "--run", String(last.seq), "--thickness", "84.1nm"];
    expect((await typed(words)) as object).toMatchObject({ notices: [] });
    expect((await typed(words)) as object).toMatchObject({ notices: [expect.stringContaining("just this reading")] });
  });

  it("is refused with what would do, and nothing is written", async () => {
    const { ws, say, last } = await desk();
    const clean = ws.ledger.entries.find(({ kind }) => kind === "clean")?.seq;
    const { length } = ws.ledger.entries;
    const cases: [Record<string, unknown>, string, string][] = [
      [{ run: 999_999, index: 2 }, "no-such-run", `ends with entry ${length - 1}`],
      [{ run: "last", index: 2 }, "no-such-run", "--run 118"],
      [{ run: -3, index: 2 }, "no-such-run", "--run 118"],
      [{ run: clean, index: 2.05 }, "not-a-run", "the latest runs of"],
      [{ run: 0, index: 2.05 }, "not-a-run", "name the entry of the run"],
      [{ run: last.seq }, "nothing-read", "--thickness 84.1nm"],
      [{ run: last.seq, index: "-" }, "nothing-read", ""],
      [{ run: last.seq, index: 84.1 }, "impossible-value", "index, then thickness"],
      [{ run: last.seq, thickness: "84.1 um" }, "impossible-value", ""],
      [{ run: last.seq, thickness: "84,1 nm" }, "decimal-comma", ""],
      [{ run: last.seq, weighted_reflectance: 0.02 }, "impossible-value", "fraction"],
      [{ run: last.seq, weighted_reflectance: "2.3" }, "missing-unit", "2.3%"],
      [{ run: last.seq, index: 2.05, on: "wafer" }, "bad-on", ""],
      [{ run: last.seq, index: 2.05, on: "cell" }, "index-on-texture", "witness"],
      [{ run: last.seq, index: 2.05, gauge: "elipsometer" }, "unknown-gauge", "did you mean ellipsometer?"],
      [{ run: last.seq, spectrum: "percent.csv" }, "out-of-bounds", "reflectance_percent"],
      [{ run: last.seq, spectrum: "sites.csv" }, "unknown-column", ""],
      [{ run: last.seq, index: 2.05, at: "2099-01-01T00:00:00Z" }, "future-time", ""],
      [{ run: last.seq, index: 2.05, silane: 800 }, "unknown-argument", ""],
    ];
    for (const [args, code, hint] of cases) {
      const { ok, error } = await say("record reading", args);
      expect([args, ok, error?.code]).toEqual([args, false, code]);
      expect(error.hint ?? "").toContain(hint);
    }
    expect((await say("record reading", { index: 2 })).error.code).toBe("missing-argument");
    expect(ws.ledger.entries).toHaveLength(length);
  });

  it("marks a proposal made since its run, and leaves it as it was written", async () => {
    const { ws, say, last } = await desk();
    const asked = await say("propose", { chamber: "A2" });
    const proposal = [...ws.ledger.proposals.values()].at(-1);
    if (!asked.ok || !proposal) throw new Error("the demo has a proposal");
    const text = JSON.stringify(proposal.data);
    const done = await say("record reading", { run: last.seq, index: 2.05 });
    expect(done.result["made_before"]).toContain(asked.result["proposal"]);
    expect(proposal.restsOnLate).toEqual([done.result["entry"]]);
    expect(JSON.stringify(proposal.data)).toBe(text);
    const again = await say("propose", { chamber: "A2" });
    expect(again.result["proposal"]).not.toBe(asked.result["proposal"]);
  });

  it("can be corrected, moved to another run, and not emptied", async () => {
    const { ws, say, runs } = await desk();
    const [a, b] = runs.slice(-2);
    const { result } = await say("record reading", { run: b.seq, thickness: "48.1 nm" });
    const correct = (fields: Record<string, unknown>) =>
      say("correct", { entry: result["entry"], fields, reason: "slip" });
    expect((await correct({ thickness: "84.1 nm", run: a.seq })).ok).toBe(true);
    expect(ws.ledger.runs.get(a.seq)?.later.map(({ reading }) => reading.thickness_nm)).toEqual([84.1]);
    expect(ws.ledger.runs.get(b.seq)?.later).toEqual([]);
    expect((await correct({ thickness: "-" })).error.code).toBe("bad-entry");
    expect((await correct({ run: result["entry"] })).error.code).toBe("not-a-run");
  });
});

describe("record gauge", () => {
  const reference = { gauge: "ellipsometer", reference: true };
  it("keeps a reading of the reference wafer and says what the gauge reads too high now", async () => {
    const { ws, say } = await desk();
    const known = ws.ledger.gaugeReadings.length;
    const { result } = await say("record gauge", { ...reference, index: 2.018, thickness: "79.9 nm" });
    expect(result["said"]).toMatch(
      /^ellipsometer now reads [+-]0\.00\d\d \(sd 0\.00\d\d\) in index and .* beside its reference wafer; before it, [+-]/,
    );
    expect(ws.ledger.gaugeReadings).toHaveLength(known + 1);
    const chamber = await say("chamber", { name: "A2" });
    expect(JSON.stringify(chamber.result["learned"])).toContain("Gauge ellipsometer now reads");
    expect(JSON.stringify((await say("check", {})).result["implications"])).toContain("Gauge ellipsometer now reads");
  });

  it("moves what is believed of every chamber, and what the next reading is foreseen to be stays with the gauge", async () => {
    const { ws, say } = await desk();
    const film = (): number[] => ["A1", "A2"].map((name) => chamberView(ws, name).now.film?.index ?? 0);
    const read = (): number[] => ["A1", "A2"].map((name) => chamberView(ws, name).now.predicted.index?.mean ?? 0);
    const [filmBefore, readBefore] = [film(), read()];
    for (let i = 0; i < 4; i++) await say("record gauge", { ...reference, index: 2.027 });
    film().forEach((index, i) => {
      expect(index).toBeLessThan(filmBefore[i] - 0.001);
      expect(Math.abs(read()[i] - readBefore[i])).toBeLessThan(0.003);
      // What the gauge will show of a film is the film and what the gauge reads too high.
      const bias = ws.gaugeBiases.get("ellipsometer")?.at(ws.ports.now() / 86_400_000).index ?? 0;
      expect(bias).toBeGreaterThan(0.002);
      expect(read()[i] - index).toBeCloseTo(bias, 4);
    });
  });

  it("leaves a far-off reading aside and says so; it can be corrected", async () => {
    const { ws, say } = await desk();
    const { result } = await say("record gauge", { ...reference, index: 2.45 });
    expect(result["said"]).toContain("left aside");
    await say("correct", { entry: result["entry"], fields: { index: 2.014 }, reason: "digits" });
    expect(ws.gaugeBiases.get("ellipsometer")).toMatchObject({ doubted: [], readings: { index: 5, thicknessNm: 4 } });
    expect((await say("correct", { entry: result["entry"], fields: { index: "-" }, reason: "x" })).ok).toBe(false);
  });

  it("is refused with what would do", async () => {
    const { ws, say } = await desk();
    const { length } = ws.ledger.entries;
    const cases: [Record<string, unknown>, string][] = [
      [{ gauge: "ellipsometer", index: 2.04 }, "missing-argument"],
      [{ reference: true, index: 2.04 }, "missing-argument"],
      [{ ...reference }, "nothing-read"],
      [{ ...reference, gauge: "elipsometer", index: 2 }, "unknown-gauge"],
      [{ ...reference, gauge: "reflectometer", index: 2 }, "gauge-reads-nothing"],
      [{ ...reference, index: 85 }, "impossible-value"],
      [{ ...reference, thickness: "85 sccm" }, "wrong-unit"],
      [{ ...reference, thickness: "79.4" }, "accepted"],
    ];
    for (const [args, code] of cases) {
      const { ok, error } = await say("record gauge", args);
      expect([args, ok ? "accepted" : error.code]).toEqual([args, code]);
    }
    expect(ws.ledger.entries).toHaveLength(length + 1);
  });
});
