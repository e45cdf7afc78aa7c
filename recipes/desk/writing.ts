/**
 * Writing to the book from the desk: every writing act first records a changed line file, then its own entries, in one
 * transaction; recipe views are written again afterwards.
 */
import { createHash } from "node:crypto";
import type { Receipt } from "../record/book.ts";
import type { AnyDraft } from "../record/entries.ts";
import type { Ledger } from "../record/ledger.ts";
import { loosened, textDifference } from "./line-changes.ts";
import { writeViews } from "./views.ts";
import { LINE_FILE, type Workspace } from "./workspace.ts";

/** When it happened and who did it; both may be left to the book. */
export interface Stamp {
  /** ISO 8601 with Z. */
  at?: string;
  by?: string;
}

export interface Written {
  /** Receipts of the act's own entries, in order. */
  receipts: Receipt[];
  /** What a person should be told: a changed line file, a loosened window, an interrupted append set aside. */
  notices: string[];
}

const VERSION = "coatwright";

/** Entries about the line file itself that must come first: the book's first entry, or a difference. */
function lineDrafts(ws: Workspace, ledger: Ledger): { drafts: AnyDraft[]; notices: string[] } {
  const line = ws.line;
  const text = new TextDecoder().decode(ws.readBeside(LINE_FILE));
  if (ledger.lineFile === null)
    return { drafts: [{ kind: "line", data: { line: line.name, created_by: VERSION, line_file: text } }], notices: [] };
  if (ledger.lineFile === text) return { drafts: [], notices: [] };
  const wider = loosened(ledger.lineFile, line, (name) => ws.readBeside(name));
  const before = createHash("sha256").update(ledger.lineFile).digest("hex");
  const difference = textDifference(ledger.lineFile, text);
  return {
    drafts: [{ kind: "line file", data: { before, after: text, difference, loosened: wider } }],
    notices: [
      `line.yaml has changed since the last entry: recorded (${difference.length} lines differ).`,
      ...wider.map((w) => `LOOSENED: ${w}`),
    ],
  };
}

/**
 * Writes what `make` drafts on the ledger as it is under the lock. With `dryRun` nothing is written and the drafts come
 * back. Throws what reading the line and the book throws.
 */
export async function write(
  ws: Workspace,
  make: (ledger: Ledger, next: number) => AnyDraft[],
  options: { dryRun?: boolean } = {},
): Promise<Written & { drafts: AnyDraft[] }> {
  if (options.dryRun) return { receipts: [], notices: [], drafts: make(ws.ledger, ws.ledger.entries.length) };
  let own: AnyDraft[] = [];
  let notices: string[] = [];
  const receipts = await ws.book.write((_entries, next) => {
    const first = lineDrafts(ws, ws.ledger);
    own = make(ws.ledger, next + first.drafts.length);
    notices = first.notices;
    return [...first.drafts, ...own];
  });
  notices.push(...new Set(receipts.flatMap((r) => r.notices)));
  notices.push(...writeViews(ws));
  return { receipts: receipts.slice(receipts.length - own.length), notices, drafts: own };
}
