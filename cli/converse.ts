/**
 * `converse`: one JSON request a line, one JSON answer a line, in order, in one running process. The lock is held for each
 * writing verb only; a malformed line is answered with id null and the process goes on.
 */

import { createInterface } from "node:readline";
import type { Readable, Writable } from "node:stream";
import { refuse } from "../engine/index.ts";
import { argsFromRequest } from "./args.ts";
import { errorDocument, perform, type World } from "./perform.ts";
import { verbNamed } from "./verbs/table.ts";

const longestLine = 1_000_000;

interface Request {
  id: unknown;
  verb: string;
  args: Record<string, unknown>;
}

function parseRequest(line: string): Request {
  if (line.length > longestLine) refuse("too-long", `a request of ${line.length} characters; at most ${longestLine}`);
  let parsed: unknown;
  try {
    parsed = JSON.parse(line);
  } catch (error) {
    return refuse("bad-json", `not a line of JSON: ${(error as Error).message}`);
  }
  if (typeof parsed !== "object" || parsed === null || Array.isArray(parsed))
    return refuse("bad-request", "a request is an object with id, verb and args");
  const { id, verb, args = {}, ...rest } = parsed as Record<string, unknown>;
  const [strange] = Object.keys(rest);
  if (strange !== undefined) refuse("bad-request", `a request has id, verb and args, not "${strange}"`);
  if (typeof verb !== "string") return refuse("bad-request", "verb is not given");
  if (typeof args !== "object" || args === null || Array.isArray(args))
    return refuse("bad-request", "args must be an object");
  return { id, verb, args: args as Record<string, unknown> };
}

export async function answer(line: string, world: World, folder: string | undefined): Promise<Record<string, unknown>> {
  let request: Request;
  try {
    request = parseRequest(line);
  } catch (error) {
    return { id: null, ok: false, ...errorDocument(error) };
  }
  const id = request.id ?? null;
  try {
    const verb = verbNamed(request.verb);
    const outcome = await perform(verb, argsFromRequest(verb, request.args), world, folder);
    return {
      id,
      ok: true,
      result: { schema: 1, ...outcome.document, ...(outcome.notices?.length ? { notices: outcome.notices } : {}) },
    };
  } catch (error) {
    return { id, ok: false, ...errorDocument(error) };
  }
}

export async function converse(
  input: Readable,
  output: Writable,
  world: World,
  folder: string | undefined,
): Promise<void> {
  for await (const line of createInterface({ input, crlfDelay: Number.POSITIVE_INFINITY })) {
    if (line.trim() === "") continue;
    const text = `${JSON.stringify(await answer(line, world, folder))}\n`;
    if (!output.write(text)) await new Promise((resolve) => output.once("drain", resolve));
  }
}
