/** Recording what happened: runs with their readings, the recipe in force, cleans, services, notes. One entry each. */

import { nearestWord, refuse } from "../../engine/index.ts";
import { alarmNames } from "../advice/alarm-checks.ts";
import type { Chamber } from "../line/line.ts";
import { nameProblem } from "../line/names.ts";
import { asQuantities, type GivenSettings, parseSet } from "../line/settings.ts";
import { outside } from "../line/window.ts";
import { openChange } from "../record/changes.ts";
import type { AnyDraft } from "../record/entries.ts";
import { decidedBefore } from "../record/late.ts";
import { keepSpectrum } from "../record/spectra.ts";
import { recipeInForce, recipesOf } from "../record/versions.ts";
import { canonicalSettings } from "./learn.ts";
import { type Given, type ReadingGiven, readingsOf, wholeNumber } from "./readings-given.ts";
import { runSentence } from "./run-sentence.ts";
import type { Workspace } from "./workspace.ts";
import { type Stamp, type Written, write } from "./writing.ts";

export type { Given } from "./readings-given.ts";

export interface RunGiven extends ReadingGiven {
  chamber: string;
  set?: GivenSettings;
  recipe?: string;
  step?: string;
  boat?: string;
  position?: string;
  sinceClean?: Given;
  count?: Given;
  kind?: string;
  note?: string;
}

export interface Recorded extends Written {
  entry: number | null;
  hash: string | null;
  sentence: string;
  drafts: AnyDraft[];
  /** Proposals and verdicts made before what was recorded here was known, by name. */
  madeBefore: string[];
}

/** The settings a run was made with: what was given over what was in force when it happened. */
export function runSettings(
  ws: Workspace,
  chamber: Chamber,
  recipe: string,
  given: GivenSettings | undefined,
  atMs: number,
) {
  const set = parseSet(given ?? [], chamber, { allowOutside: true });
  const force = recipeInForce(ws.ledger, chamber.name, recipe, atMs);
  const base = force ? canonicalSettings(ws.line, force.steps) : new Map<string, number>();
  const settings = new Map([...base, ...set]);
  if (settings.size === 0)
    refuse("no-settings", `nothing is in force on ${chamber.name} under ${recipe} and no --set was given`, {
      hint: `coatwright record recipe --chamber ${chamber.name} --recipe ${recipe} --set silane=812sccm ...`,
    });
  const from = !force
    ? "given"
    : set.size === 0
      ? force.stated
        ? "in force"
        : "latest run"
      : set.size >= base.size
        ? "given"
        : `in force, with ${[...set.keys()].join(", ")} given`;
  return { settings, from };
}

/** What was written, with what had been decided before it was known. */
export function one(ws: Workspace, written: Written & { drafts: AnyDraft[] }, sentence: string): Recorded {
  const receipt = written.receipts.at(-1);
  const madeBefore = decidedBefore(
    ws.ledger,
    written.receipts.map(({ seq }) => seq),
  );
  const few = madeBefore.length > 4 ? [...madeBefore.slice(0, 3), `${madeBefore.length - 3} more`] : madeBefore;
  const notices =
    madeBefore.length === 0
      ? written.notices
      : [
          ...written.notices,
          `Made before this was known, and marked so: ${few.join(", ")}. ${madeBefore.length === 1 ? "It stays" : "They stay"} as written.`,
        ];
  return { ...written, notices, entry: receipt?.seq ?? null, hash: receipt?.hash ?? null, sentence, madeBefore };
}

export async function recordRun(ws: Workspace, run: RunGiven, how: Stamp & { dryRun?: boolean }): Promise<Recorded> {
  const chamber = ws.chamber(run.chamber);
  if (run.step !== undefined) refuse("many-steps", "recipes of one layer are handled so far: leave --step out");
  if (run.kind !== undefined && run.kind !== "tuning" && run.kind !== "production")
    refuse("bad-kind", `--kind is tuning or production, not ${run.kind}`);
  const recipe = recipeNamed(ws, chamber.name, run.recipe);
  const atMs = how.at ? Date.parse(how.at) : ws.ports.now();
  const readings = readingsOf(ws, run);
  const { settings, from } = runSettings(ws, chamber, recipe, run.set, atMs);
  const count = wholeNumber("--count", run.count, 1) ?? 1;
  const sinceClean = wholeNumber("--since-clean", run.sinceClean, 0);
  const sentence = runSentence(ws, chamber, settings, readings);
  if (run.spectrum && !how.dryRun) keepSpectrum(ws.folder, ws.ports, run.spectrum);
  const outsideNow = outside(settings, chamber, ws.line).map((f) => f.sentence);
  const written = await write(
    ws,
    () => [
      {
        kind: "run",
        at: how.at,
        by: how.by,
        data: {
          chamber: chamber.name,
          recipe,
          settings_from: from,
          steps: [{ settings: asQuantities(settings, chamber) }],
          count,
          ...(sinceClean !== undefined ? { since_clean: sinceClean } : {}),
          ...(run.kind ? { kind: run.kind as "tuning" | "production" } : {}),
          ...(run.boat ? { boat: run.boat } : {}),
          ...(run.position ? { position: run.position } : {}),
          readings,
          ...(run.note ? { note: run.note } : {}),
        },
      },
    ],
    how,
  );
  written.notices.push(...outsideNow, ...unentered(ws, chamber.name, recipe, run.set));
  return one(ws, written, sentence);
}

/** A change adopted but not entered: whoever typed it in and forgot to say so books runs on the wrong settings. */
function unentered(ws: Workspace, chamber: string, recipe: string, set: GivenSettings | undefined): string[] {
  const open = openChange(ws.ledger, chamber, recipe);
  if (open?.state !== "adopted" || (set && Object.keys(set).length > 0)) return [];
  return [
    `${open.id} is adopted but not entered, so this run is booked on the settings before it. If it was typed in already: coatwright enter ${open.id} --at TIME, with a time before the run.`,
  ];
}

/** The recipe a run is booked under; a new name is taken only where the chamber has none yet or the line declares it. */
function recipeNamed(ws: Workspace, chamber: string, named: string | undefined): string {
  if (named === undefined) return ws.recipe(chamber);
  properName(named);
  const known = recipesOf(ws.ledger, chamber);
  if (known.length === 0 || known.includes(named) || ws.line.recipes.has(named)) return named;
  const near = nearestWord(named, known);
  return refuse("unknown-recipe", `${chamber} never ran a recipe ${named}`, {
    hint: near
      ? `did you mean ${near}?`
      : `it runs ${known.join(", ")}; a new one is stated first: coatwright record recipe --chamber ${chamber} --recipe ${named} --set ...`,
  });
}

function properName(name: string): void {
  const complaint = nameProblem(name);
  if (complaint) refuse("bad-name", complaint.message, { hint: complaint.hint });
}

/** States what is in force. All settings the model needs must be given, or be in force already. */
export async function recordRecipe(
  ws: Workspace,
  given: { chamber: string; recipe: string; set: GivenSettings; reason?: string },
  how: Stamp & { dryRun?: boolean },
): Promise<Recorded> {
  const chamber = ws.chamber(given.chamber);
  properName(given.recipe);
  const atMs = how.at ? Date.parse(how.at) : ws.ports.now();
  const set = parseSet(given.set, chamber);
  if (set.size === 0)
    refuse("no-settings", "no settings were given", {
      hint: "--set silane=812sccm --set ammonia=6900sccm --set time=560s",
    });
  const force = recipeInForce(ws.ledger, chamber.name, given.recipe, atMs);
  const settings = new Map([...(force ? canonicalSettings(ws.line, force.steps) : []), ...set]);
  const missing = [...chamber.settings.values()].filter((s) => s.tune && !settings.has(s.name)).map((s) => s.name);
  if (missing.length > 0)
    refuse("missing-setting", `${missing.join(", ")} ${missing.length > 1 ? "are" : "is"} not given`, {
      hint: "a recipe states every setting that is tuned",
    });
  const found = outside(settings, chamber, ws.line);
  if (found.length > 0)
    refuse("outside-window", found.map((f) => f.sentence).join(" "), {
      hint: "the window can be changed only in line.yaml",
    });
  const written = await write(
    ws,
    () => [
      {
        kind: "recipe",
        at: how.at,
        by: how.by,
        data: {
          chamber: chamber.name,
          recipe: given.recipe,
          steps: [{ settings: asQuantities(settings, chamber) }],
          ...(given.reason ? { reason: given.reason } : {}),
        },
      },
    ],
    how,
  );
  return one(
    ws,
    written,
    `${given.recipe} is stated for ${chamber.name}: ${settings.size} settings, from here corrections add up.`,
  );
}

export async function recordEvent(
  ws: Workspace,
  event:
    | { kind: "clean" | "service"; chamber: string; what?: string }
    | { kind: "precoat"; chamber: string; count: Given },
  how: Stamp & { dryRun?: boolean },
): Promise<Recorded> {
  const chamber = ws.chamber(event.chamber).name;
  const stamp = { at: how.at, by: how.by };
  let draft: AnyDraft;
  let sentence: string;
  if (event.kind === "precoat") {
    const count = wholeNumber("--count", event.count, 1) ?? 1;
    draft = { kind: "precoat", ...stamp, data: { chamber, count } };
    sentence = `${count} precoat deposition${count > 1 ? "s" : ""} on ${chamber}.`;
  } else if (event.kind === "clean") {
    draft = { kind: "clean", ...stamp, data: { chamber, ...(event.what ? { what: event.what } : {}) } };
    sentence = `${chamber} starts a new cycle: measure its first runs, a clean moves index and rate.`;
  } else {
    if (!event.what?.trim()) refuse("no-what", "a service needs to say what was done", { hint: "--what TEXT" });
    draft = { kind: "service", ...stamp, data: { chamber, what: event.what } };
    sentence = `${chamber} starts a new hardware epoch: what was known of its offset counts less from here on.`;
  }
  return one(ws, await write(ws, () => [draft], how), sentence);
}

/** A note, or with `override` a person's overruling of one named alarm for a number of runs. */
export async function recordNote(
  ws: Workspace,
  note: { chamber?: string; text: string; override?: { alarm: string; runs: Given } },
  how: Stamp & { dryRun?: boolean },
): Promise<Recorded> {
  if (!note.text?.trim()) refuse("no-text", "a note needs a text", { hint: "--text TEXT" });
  const chamber = note.chamber === undefined ? undefined : ws.chamber(note.chamber).name;
  let override: { alarm: string; runs: number; chamber: string } | undefined;
  if (note.override) {
    if (!chamber) refuse("no-chamber", "an override names a chamber", { hint: "--chamber NAME" });
    const { alarm } = note.override;
    if (!alarmNames.some((name) => name === alarm))
      refuse("unknown-alarm", `no alarm ${alarm}`, { hint: `alarms are ${alarmNames.join(", ")}` });
    const allowed = ws.line.people.override;
    const person = how.by ?? ws.ports.person;
    if (allowed.length > 0 && !allowed.includes(person))
      refuse("not-allowed", `${person} may not override alarms on this line`, {
        hint: `line.yaml names ${allowed.join(", ")}`,
      });
    override = { alarm: note.override.alarm, runs: wholeNumber("--runs", note.override.runs, 1) ?? 1, chamber };
  }
  const draft: AnyDraft = {
    kind: "note",
    at: how.at,
    by: how.by,
    data: { ...(chamber ? { chamber } : {}), text: note.text, ...(override ? { override } : {}) },
  };
  const written = await write(ws, () => [draft], how);
  return one(
    ws,
    written,
    override
      ? `${override.alarm} is overruled on ${override.chamber} for ${override.runs} runs, or until the next clean.`
      : "Noted.",
  );
}
