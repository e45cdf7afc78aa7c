/** The JSON conversation drives the same loop as the verbs, in one process; malformed lines do not end it. */
import { PassThrough } from "node:stream";
import { describe, expect, it } from "vitest";
import { answer, converse } from "../../../cli/converse.ts";
import type { World } from "../../../cli/perform.ts";
import { demoLine } from "../../support/desk-line.ts";

async function demoWorld(): Promise<World> {
  const ws = await demoLine();
  return {
    ports: ws.ports,
    cwd: "/",
    resolve: () => "/line",
    readFile: () => new Uint8Array(),
    open: new Map([["/line", ws]]),
  };
}

interface Answer {
  id: unknown;
  ok: boolean;
  result?: Record<string, unknown>;
  error?: { code: string; message: string };
}

describe("converse", () => {
  it("tells the whole story: propose, adopt, enter, run, close, undo, report", async () => {
    const world = await demoWorld();
    const say = async (verb: string, args: Record<string, unknown>): Promise<Record<string, unknown>> => {
      const got = (await answer(JSON.stringify({ id: 1, verb, args }), world, undefined)) as unknown as Answer;
      expect(got.ok, JSON.stringify(got.error)).toBe(true);
      return got.result as Record<string, unknown>;
    };
    const proposed = await say("propose", { chamber: "A2" });
    expect(proposed["advice"]).toBe("change");
    expect(Object.keys(proposed)).toEqual(
      expect.arrayContaining([
        "schema",
        "chamber",
        "recipe",
        "mode",
        "advice",
        "before",
        "after",
        "predicted",
        "without_change",
        "chance_in_goal",
        "chance_in_goal_without_change",
        "because",
        "cannot_tell",
        "alarms",
        "cautions",
        "rests_on",
        "proposal",
        "done",
      ]),
    );
    const { change } = await say("adopt", { proposal: proposed["proposal"], reason: "thin" });
    await say("enter", { change });
    const run = await say("record run", { chamber: "A2", index: 2.058, thickness: "88.2 nm" });
    expect(run["entry"]).toBeTypeOf("number");
    expect(run["hash"]).toMatch(/^[0-9a-f]{64}$/);
    const closed = await say("close", { change });
    expect(closed["verdict"]).toMatch(/^as expected; 1 of 1 measured run in goal/);
    const undone = await say("undo", { change, reason: "to try it" });
    expect(undone["cancelled"]).toBe(false);
    const { markdown } = await say("report", { change });
    expect(markdown).toMatch(/undone/);
  });

  it("answers in order, names what is wrong, and goes on after a malformed line", async () => {
    const world = await demoWorld();
    const input = new PassThrough();
    const output = new PassThrough();
    input.end(
      [
        "not json",
        '{"id":1,"verb":"predict","args":{"chamber":"A1"}}',
        '{"id":2,"verb":"propose","args":{"chamber":"A9"}}',
        '{"id":3,"verb":"propose","args":{"chambre":"A1"}}',
        '{"id":4,"verb":"nothing"}',
        '{"id":5,"verb":"run","args":{"chamber":"A1","index":1e999,"thickness":88}}',
        '{"id":6,"verb":"predict","args":{"chamber":"A1","set":{"time":"560 s"}}}',
      ].join("\n"),
    );
    await converse(input, output, world, undefined);
    const answers = String(output.read())
      .trim()
      .split("\n")
      .map((l) => JSON.parse(l) as Answer);
    expect(answers.map((a) => [a.id, a.ok])).toEqual([
      [null, false],
      [1, true],
      [2, false],
      [3, false],
      [4, false],
      [5, false],
      [6, true],
    ]);
    expect(answers.map((a) => a.error?.code)).toEqual([
      "bad-json",
      undefined,
      "unknown-chamber",
      "unknown-argument",
      "unknown-verb",
      expect.stringMatching(/number|argument/),
      undefined,
    ]);
  });
});
