/** A sealed prediction is dated by the book, held by its hash, and counted against the first run measured since. */
import { beforeEach, describe, expect, it } from "vitest";
import { sealCount } from "../../../recipes/desk/shadow-words.ts";
import { countSeals, seal } from "../../../recipes/desk/shadowing.ts";
import { recordRun, type Workspace } from "../../../recipes/index.ts";
import { lineWith, onGoal, play } from "../../support/desk-line.ts";
import type { memoryPorts } from "../../support/memory-files.ts";
import { refusalCode } from "../../support/refusal.ts";

const hour = 3_600_000;
const sealNow = (ws: Workspace, dryRun = false) => seal(ws, { chamber: "A1", dryRun, draft: {} });
const fates = (ws: Workspace) => countSeals(ws).map((s) => s.fate);

let ws: Workspace;
const later = () => {
  (ws.ports as ReturnType<typeof memoryPorts>).clock.ms += hour;
};
/** A measured run entered now, an hour on. */
const run = (set: Record<string, string> = {}, index = 2.06, nm = 88) => {
  later();
  return recordRun(ws, { chamber: "A1", set, index, thickness: `${nm} nm` }, {});
};
const path = (hash: string) => `/line/shadow/${hash}.json`;

beforeEach(async () => {
  ws = lineWith({
    "  weighted_reflectance: at most 2.5 %\n": "",
    "  reflectance_minimum: 600 nm within 15 nm\n": "",
  });
  const played = play(ws, "A1", "sealed");
  await played.recipe(onGoal);
  await played.run(onGoal, 4);
});

describe("a seal", () => {
  it("is a document in the folder and its hash in a note, waiting for a run", async () => {
    const before = ws.ledger.entries.length;
    const { hash, document } = await sealNow(ws);
    expect(ws.ports.files.exists(path(hash))).toBe(true);
    expect(ws.ledger.entries.at(-1)).toMatchObject({ kind: "note", data: { chamber: "A1", text: `shadow ${hash}` } });
    expect(ws.ledger.entries.length).toBeGreaterThan(before);
    expect(document).toMatchObject({ chamber: "A1", recipe: "blue", settings: { silane: 808 } });
    expect(document.tuned_ewma).not.toBeNull();
    expect(fates(ws)).toEqual(["waiting"]);
  });

  it("writes nothing in a dry run, and nothing sealed is refused", async () => {
    const before = ws.ledger.entries.length;
    const { hash } = await sealNow(ws, true);
    expect(ws.ports.files.exists(path(hash))).toBe(false);
    expect(ws.ledger.entries.length).toBe(before);
    expect(refusalCode(() => countSeals(ws))).toBe("no-seals");
  });

  it("is counted against the first run measured since, inside or not", async () => {
    const { document } = await sealNow(ws);
    const { index, thickness_nm } = document.predicted;
    await run({}, Number(index?.mean.toFixed(3)), Number(((thickness_nm?.high ?? 0) + 1).toFixed(1)));
    await run();
    const [counted] = countSeals(ws);
    expect(counted).toMatchObject({ fate: "counted", index: { inside: true }, thicknessNm: { inside: false } });
    const count = sealCount([counted]);
    expect(count.inside).toEqual({ index: { inside: 1, of: 1 }, thicknessNm: { inside: 0, of: 1 } });
    expect(count.misses.thicknessNm?.ours).toBeCloseTo(Math.abs(counted.thicknessNm?.miss ?? 0), 12);
  });

  it("says nothing of a run that had been made before it, though entered after", async () => {
    await sealNow(ws);
    const at = new Date(ws.ports.now() - 2 * hour).toISOString();
    await recordRun(ws, { chamber: "A1", set: {}, index: 2.06, thickness: "88 nm" }, { at });
    expect(fates(ws)).toEqual(["waiting"]);
  });

  it("says nothing of other settings, and of two seals before a run the last counts", async () => {
    await sealNow(ws);
    await run({ time: "600 s" });
    await sealNow(ws);
    later();
    await sealNow(ws);
    await run();
    expect(fates(ws)).toEqual(["other_settings", "superseded", "counted"]);
  });

  it("cannot be rewritten or lost unnoticed", async () => {
    const { hash } = await sealNow(ws);
    await run();
    const { files } = ws.ports;
    const bytes = files.read(path(hash));
    bytes[bytes.length - 3] ^= 1;
    files.remove(path(hash));
    expect(fates(ws)).toEqual(["missing"]);
    const handle = files.createExclusive(path(hash));
    files.write(handle, bytes, 0, bytes.length, null);
    files.close(handle);
    expect(fates(ws)).toEqual(["altered"]);
    expect(sealCount(countSeals(ws)).says).toContain("whose document is not the one that was sealed");
  });
});
