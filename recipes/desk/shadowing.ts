/**
 * Predictions sealed before the fact. A seal is a document saying what the next measured run of a chamber at the recipe in
 * force will read, kept as shadow/HASH.json in the line folder; the book holds, in a plain note, the SHA-256 of its bytes.
 * The book's chain dates the note, the hash holds the document: neither can be written afterwards. Counting compares each
 * seal with the first run measured since, in the order things were entered.
 *
 *     note     text "shadow HASH", HASH 64 lower-case hex digits
 *     document canonical JSON (record/canonical.ts) and a line feed: {schema: 1, chamber, recipe, settings: {name: number in
 *              canonical units}, predicted, tuned_ewma: {index, thickness_nm} or null, rests_on}
 */
import { Refusal, refuse } from "../../engine/index.ts";
import { goalOf } from "../line/line.ts";
import { replaceFile } from "../record/atomic-replace.ts";
import { canonicalJson, sha256 } from "../record/canonical.ts";
import { fileRefusal, inFolder } from "../record/file-trouble.ts";
import { chamberRecord } from "../record/ledger.ts";
import { runsOf } from "../record/timeline.ts";
import { inForce, predict, predictedDocument } from "./asking.ts";
import { canonicalSettings } from "./learn.ts";
import { rivalOf, weighed } from "./rival.ts";
import type { Workspace } from "./workspace.ts";
import { type Stamp, type Written, write } from "./writing.ts";

const FOLDER = "shadow";
const NOTE = /^shadow ([0-9a-f]{64})$/;

interface Range {
  mean: number;
  low: number;
  high: number;
}

export interface SealDocument {
  schema: 1;
  chamber: string;
  recipe: string;
  settings: Record<string, number>;
  predicted: { index: Range | null; thickness_nm: Range | null };
  tuned_ewma: { index: number; thickness_nm: number } | null;
  rests_on: { book: string; line_file: string };
}

export interface Sealed extends Written {
  hash: string;
  document: SealDocument;
}

/** Seals what the next measured run of a chamber at the recipe in force will read. Refuses as `predict` and `write` do. */
export async function seal(
  ws: Workspace,
  how: { chamber: string; recipe?: string; dryRun: boolean; draft: Stamp },
): Promise<Sealed> {
  const { name } = ws.chamber(how.chamber);
  const recipe = ws.recipe(name, how.recipe);
  const { expected } = predict(ws, name, recipe, new Map());
  const { settings } = inForce(ws, name, recipe);
  const found = predictedDocument(expected.predicted) as unknown as SealDocument["predicted"];
  const rival = rivalOf(ws, name, settings, weighed(goalOf(ws.line, recipe), expected.film))?.expects(settings);
  const document: SealDocument = {
    schema: 1,
    chamber: name,
    recipe,
    settings: Object.fromEntries(settings),
    predicted: { index: found.index, thickness_nm: found.thickness_nm },
    tuned_ewma: rival ? { index: rival.index, thickness_nm: rival.thicknessNm } : null,
    rests_on: { book: ws.book.hash, line_file: ws.line.hash },
  };
  const bytes = new TextEncoder().encode(`${canonicalJson(document)}\n`);
  const hash = sha256(bytes);
  // The document first: a note without its document would be a seal that can never be opened.
  if (!how.dryRun) keep(ws, hash, bytes);
  const draft = { kind: "note" as const, ...how.draft, data: { chamber: name, text: `shadow ${hash}` } };
  const { receipts, notices } = await write(ws, () => [draft], { dryRun: how.dryRun });
  return { hash, document, receipts, notices };
}

function keep({ folder, ports }: Workspace, hash: string, bytes: Uint8Array): void {
  const place = inFolder(folder, FOLDER);
  try {
    if (!ports.files.isFolder(place)) {
      ports.files.makeFolder(place);
      ports.files.syncFolder(folder);
    }
  } catch (error) {
    throw fileRefusal(error, `make ${FOLDER}`, FOLDER);
  }
  replaceFile(ports, inFolder(folder, `${FOLDER}/${hash}.json`), bytes);
}

/**
 * What became of a seal: counted; no run measured since; the run since had other settings; a later seal spoke of the same
 * run; its document is gone; its document is not the one that was sealed.
 */
export type Fate = "counted" | "waiting" | "other_settings" | "superseded" | "missing" | "altered";

export interface SealCounted {
  note: number;
  hash: string;
  fate: Fate;
  chamber: string | null;
  /** The run it is held against. */
  run: number | null;
  index: { read: number; inside: boolean; miss: number; rivalMiss: number | null } | null;
  thicknessNm: { read: number; inside: boolean; miss: number; rivalMiss: number | null } | null;
}

/** Opens every seal of the book, or of one chamber. Refuses `no-seals`. */
export function countSeals(ws: Workspace, chamber?: string): SealCounted[] {
  if (chamber !== undefined) ws.chamber(chamber);
  if (ws.book.damage.length > 0) throw new Refusal(ws.book.problems());
  const notes = ws.ledger.entries.flatMap((entry) => {
    const hash = entry.kind === "note" ? NOTE.exec(entry.data.text)?.[1] : undefined;
    if (hash === undefined || entry.kind !== "note") return [];
    return chamber === undefined || entry.data.chamber === chamber
      ? [{ seq: entry.seq, hash, atMs: Date.parse(entry.entered) }]
      : [];
  });
  if (notes.length === 0)
    refuse("no-seals", `nothing was sealed${chamber === undefined ? "" : ` for ${chamber}`} yet`, {
      hint: "coatwright rehearse --shadow --chamber NAME seals what the next run will read",
    });
  const opened = notes.map((note) => openSeal(ws, note));
  // Of several seals before one run the last is held against it.
  return opened.map((one, i) =>
    one.fate === "counted" && opened.slice(i + 1).some((later) => later.fate === "counted" && later.run === one.run)
      ? { ...one, fate: "superseded", index: null, thicknessNm: null }
      : one,
  );
}

function openSeal(ws: Workspace, { seq, hash, atMs }: { seq: number; hash: string; atMs: number }): SealCounted {
  const bare = { note: seq, hash, chamber: null, run: null, index: null, thicknessNm: null };
  const path = inFolder(ws.folder, `${FOLDER}/${hash}.json`);
  if (!ws.ports.files.exists(path)) return { ...bare, fate: "missing" };
  const bytes = ws.ports.files.read(path);
  if (sha256(bytes) !== hash) return { ...bare, fate: "altered" };
  const document = JSON.parse(new TextDecoder().decode(bytes)) as SealDocument;
  const { chamber, recipe, predicted, tuned_ewma: rival } = document;
  // Entered and made after the seal: a run that had already happened could have been seen.
  const run = runsOf(chamberRecord(ws.ledger, chamber).timeline).find(
    (one) => one.seq > seq && one.atMs >= atMs && one.recipe === recipe && ws.filmOf(one) !== null,
  );
  if (!run) return { ...bare, chamber, fate: "waiting" };
  const settings = canonicalSettings(ws.line, run.data.steps);
  const same = Object.entries(document.settings).every(([name, value]) => settings.get(name) === value);
  if (!same) return { ...bare, chamber, run: run.seq, fate: "other_settings" };
  const film = ws.filmOf(run);
  const held = (read: number | null | undefined, range: Range | null, other: number | undefined) =>
    read === null || read === undefined || range === null
      ? null
      : {
          read,
          inside: read >= range.low && read <= range.high,
          miss: read - range.mean,
          rivalMiss: other === undefined ? null : read - other,
        };
  return {
    ...bare,
    chamber,
    run: run.seq,
    fate: "counted",
    index: held(film?.index, predicted.index, rival?.index),
    thicknessNm: held(film?.thicknessNm, predicted.thickness_nm, rival?.thickness_nm),
  };
}
