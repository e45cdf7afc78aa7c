/** When, who, and whether at all: the flags of every writing verb, and what a dry run says. */
import { describe, expect, it } from "vitest";
import { argsFromWords } from "../../../cli/args.ts";
import { exitOf, perform, type World } from "../../../cli/perform.ts";
import { findVerb, verbs } from "../../../cli/verbs/table.ts";
import { Refusal } from "../../../engine/index.ts";
import type { Workspace } from "../../../recipes/index.ts";
import { demoLine } from "../../support/desk-line.ts";

/** Noon UTC, and in Lisbon in March: the clock of the demo line in memory. */
async function desk() {
  const ws = await demoLine();
  const world: World = {
    ports: ws.ports,
    cwd: "/",
    resolve: () => "/line",
    readFile: () => new TextEncoder().encode("chamber,at,event\nA2,2026-03-19T10:00:00Z,clean\n"),
    open: new Map([["/line", ws]]),
  };
  const type = (...words: string[]) => {
    const { verb, rest } = findVerb(words);
    return perform(verb, argsFromWords(verb, rest), world, undefined);
  };
  return { ws, type };
}

const refusalOf = async (done: Promise<unknown>): Promise<Refusal> => {
  try {
    await done;
  } catch (error) {
    if (error instanceof Refusal) return error;
    throw error;
  }
  throw new Error("nothing was refused");
};

/** Every writing verb with words that it takes as far as its stamp. */
const writing = [
  ["run", "A2", "2.05", "85"],
  ["record", "run", "--chamber", "A2"],
  ["record", "reading", "--run", "12", "--index", "2.05"],
  ["record", "recipe", "--chamber", "A2", "--recipe", "blue", "--set", "time=560s"],
  ["record", "clean", "--chamber", "A2"],
  ["record", "precoat", "--chamber", "A2", "--count", "2"],
  ["record", "service", "--chamber", "A2", "--what", "valve"],
  ["record", "gauge", "--gauge", "ellipsometer", "--reference", "--index", "2.05"],
  ["record", "note", "--text", "x"],
  ["correct", "10", "index=2.05", "--reason", "x"],
  ["import", "r.csv"],
  ["propose", "--chamber", "A2"],
  ["adopt", "p-000001", "--reason", "x"],
  ["approve", "c-000001"],
  ["enter", "c-000001"],
  ["close", "c-000001"],
  ["undo", "c-000001", "--reason", "x"],
  ["rehearse", "--shadow", "--chamber", "A2"],
];

describe("a writing verb", () => {
  it("is tried below for every one there is", () => {
    const tried = writing.map((words) => findVerb(words).verb.name);
    expect(tried.sort()).toEqual(verbs.flatMap((verb) => (verb.writes ? [verb.name] : [])).sort());
  });

  it.each(writing)("%s %s refuses a time to come and a name that is none", async (...words) => {
    const { ws, type } = await desk();
    const entries = ws.ledger.entries.length;
    const future = await refusalOf(type(...words, "--at", "2026-03-20T12:06:00Z"));
    expect(future.code).toBe("future-time");
    expect(future.problems[0].hint).toMatch(/./);
    for (const by of ["", "  ", "a\nb", "\u001b[31m", "x".repeat(101)])
      expect((await refusalOf(type(...words, `--by=${by}`))).code).toBe("bad-name");
    expect(ws.ledger.entries).toHaveLength(entries);
  });

  it("takes a clock that is five minutes ahead, and a name with spaces around it", async () => {
    const { ws, type } = await desk();
    await type("record", "note", "--text", "x", "--at", "2026-03-20T12:04:00Z", "--by", "  Ana Sá ");
    expect(ws.ledger.entries.at(-1)).toMatchObject({ at: "2026-03-20T12:04:00.000Z", by: "Ana Sá" });
  });

  it("takes 23:40 for yesterday's in the night, and asks for the date at noon", async () => {
    const { ws, type } = await desk();
    const noon = await refusalOf(type("record", "note", "--text", "x", "--at", "23:40"));
    expect(noon.code).toBe("future-time");
    expect(noon.problems[0].hint).toContain("2026-03-19T23:40");
    (ws.ports as unknown as { clock: { ms: number } }).clock.ms = Date.UTC(2026, 2, 21, 1);
    await type("record", "note", "--text", "x", "--at", "23:40");
    expect(ws.ledger.entries.at(-1)?.at).toBe("2026-03-20T23:40:00.000Z");
  });
});

describe("a dry run", () => {
  const written = (ws: Workspace) => ws.ledger.entries.length;

  it("says in words what would be recorded, and records nothing", async () => {
    const { ws, type } = await desk();
    const before = written(ws);
    const run = ["run", "A2", "2.05", "85", "--reflectance-minimum", "600nm", "--by", "Rui", "--dry-run"];
    const { text } = await type(...run);
    expect(text).toMatch(/^would record a run of A2, by Rui:\n {2}recipe: blue$/m);
    expect(text).toMatch(/settings: silane 835 sccm, ammonia 6880 sccm/);
    expect(text).toMatch(/index 2\.05, thickness 85 nm; gauge reflectometer, on cell, reflectance minimum 600 nm/);
    expect(text).not.toMatch(/[{}"_]/);
    const corrected = await type("correct", "10", "thickness=84.1nm", "index=-", "--reason", "typo", "--dry-run");
    expect(corrected.text).toBe(
      "would correct entry 10:\n  fields: thickness 84.1 nm, index taken away\n  reason: typo",
    );
    expect(written(ws)).toBe(before);
  });

  it("of enter shows the value read back", async () => {
    const { ws, type } = await desk();
    const { document } = await type("propose", "--chamber", "A2");
    const adopted = await type("adopt", String(document["proposal"]), "--reason", "thin");
    const change = String(adopted.document["change"]);
    const before = written(ws);
    const { text, document: would } = await type("enter", change, "--set", "silane=834sccm", "--dry-run");
    expect(text).toMatch(/silane +834 sccm {2}\(was 835 sccm\)/);
    expect(text).toMatch(/^dry run/);
    expect(would["read_back"]).toEqual({ silane: { value: 834, unit: "sccm" } });
    expect(written(ws)).toBe(before);
  });
});

describe("an exit code", () => {
  it.each([
    ["disk-full", 2],
    ["read-only", 2],
    ["io-error", 2],
    ["not-a-lock", 2],
    ["unsafe-after-fsync", 1],
    ["damaged-book", 3],
    ["locked", 4],
  ])("of %s is %i (the contract's list)", (code, exit) => {
    expect(exitOf(new Refusal([{ code, message: "x" }]))).toBe(exit);
  });
});

describe("predict", () => {
  it("says what lies outside a range or the window, and predicts all the same", async () => {
    const { type } = await desk();
    const inside = await type("predict", "--chamber", "A2");
    expect(inside.document["outside_window"]).toEqual([]);
    const { document, text } = await type(
      "predict",
      "--chamber",
      "A2",
      "--set",
      "silane=1150sccm",
      "--set",
      "time=950s",
    );
    const sentences = document["outside_window"] as string[];
    expect(sentences).toHaveLength(2);
    expect(sentences.join(" ")).toMatch(/range of A2.*qualified window, at most 1100 sccm/);
    for (const sentence of sentences) expect(text).toContain(sentence);
  });
});

describe("chamber", () => {
  it("is looked at with the recipe named", async () => {
    const { type } = await desk();
    expect((await type("chamber", "A2", "--recipe", "blue")).document["recipe"]).toBe("blue");
    expect((await refusalOf(type("chamber", "A2", "--recipe", "green"))).code).toBe("no-recipe");
    expect((await refusalOf(type("chamber", "--recipe", "blue"))).code).toBe("missing-argument");
  });
});
