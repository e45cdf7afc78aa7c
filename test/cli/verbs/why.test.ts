/** `why` at the command line: the document people script against, and text that fits 80 columns. */
import { beforeAll, describe, expect, it } from "vitest";
import { answer } from "../../../cli/converse.ts";
import type { World } from "../../../cli/perform.ts";
import { whyText } from "../../../cli/text/why.ts";
import { cells } from "../../../cli/text/width.ts";
import { why } from "../../../recipes/index.ts";
import { demoLine } from "../../support/desk-line.ts";

describe("why on the demo line", () => {
  let world: World;
  const say = async (args: Record<string, unknown>) =>
    (await answer(JSON.stringify({ id: 1, verb: "why", args }), world, undefined)) as unknown as {
      ok: boolean;
      result: Record<string, unknown>;
      error: { code: string };
    };
  beforeAll(async () => {
    const ws = await demoLine();
    world = {
      ports: ws.ports,
      cwd: "/",
      resolve: () => "/line",
      readFile: () => new Uint8Array(),
      open: new Map([["/line", ws]]),
    };
  });

  it("answers with the documented keys, chances that add up to one, and likely causes first", async () => {
    const { ok, result } = await say({ chamber: "A2" });
    expect(ok).toBe(true);
    expect(Object.keys(result)).toEqual([
      "schema",
      "chamber",
      "onset",
      "runs",
      "miss",
      "verdict",
      "says",
      "causes",
      "refused",
      "would_tell",
      "telling_run",
    ]);
    const causes = result["causes"] as { probability: number; likely: boolean; cannot_explain: string[] }[];
    expect(causes.reduce((sum, c) => sum + c.probability, 0)).toBeCloseTo(1, 2);
    for (let i = 1; i < causes.length; i++) {
      expect(causes[i - 1].probability).toBeGreaterThanOrEqual(causes[i].probability);
      expect(Number(causes[i - 1].likely)).toBeGreaterThanOrEqual(Number(causes[i].likely));
    }
    // The demo's A2 came back from a clean four runs ago.
    expect(result["onset"]).toMatchObject({ kind: "clean", stated: false });
    expect(result["runs"]).toHaveLength(4);
  });

  it("refuses an unknown chamber and an entry that is none", async () => {
    expect((await say({ chamber: "Z9" })).error.code).toBe("unknown-chamber");
    expect((await say({ chamber: "A2", since: "soon" })).error.code).toBe("bad-entry");
    expect((await say({ chamber: "A2", since: "99999" })).error.code).toBe("no-run-since");
  });

  it("fits 80 columns for every chamber", async () => {
    const ws = await demoLine();
    for (const name of ws.line.chambers.keys()) {
      const lines = whyText(name, why(ws, name)).split("\n");
      expect(lines.length).toBeGreaterThan(5);
      for (const line of lines) expect(cells(line)).toBeLessThanOrEqual(80);
    }
  });
});
