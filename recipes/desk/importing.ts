/** Importing many runs at once: planned on the ledger under the lock, written in one go or not at all. */
import { Refusal } from "../../engine/index.ts";
import { readYaml } from "../line/yaml.ts";
import { type ImportPlan, planImport } from "../record/import/import.ts";
import { type ImportMap, readImportMap } from "../record/import/map-file.ts";
import type { Ledger } from "../record/ledger.ts";
import type { Workspace } from "./workspace.ts";
import { type Stamp, write } from "./writing.ts";

/** The line folder's own map, used when none is named. */
const MAP_FILE = "import-map.yaml";

export interface ImportGiven {
  file: string;
  bytes: Uint8Array;
  map: { file: string; bytes: Uint8Array } | null;
}

export interface Imported {
  document: Record<string, unknown>;
  text: string;
  notices: string[];
}

function mapFor(ws: Workspace, given: ImportGiven["map"]): ImportMap | undefined {
  if (given) return mapFrom(given.bytes, given.file);
  if (!ws.ports.files.exists(`${ws.folder}/${MAP_FILE}`)) return undefined;
  return mapFrom(ws.readBeside(MAP_FILE), MAP_FILE);
}

/** Throws what `readYaml` and `readImportMap` throw, by row and column. */
function mapFrom(bytes: Uint8Array, file: string): ImportMap {
  const yaml = readYaml(bytes, file);
  if (yaml.problems.length > 0) throw new Refusal(yaml.problems);
  return readImportMap(yaml.root, file, (path, at) => {
    const { row, column } = yaml.problem(path, "", "", undefined, at);
    return { row, column };
  });
}

export async function importRuns(
  ws: Workspace,
  given: ImportGiven,
  how: Stamp & { dryRun: boolean },
): Promise<Imported> {
  const map = mapFor(ws, given.map);
  const planOn = (ledger: Ledger) =>
    planImport({ bytes: given.bytes, file: given.file, line: ws.line, ledger, nowMs: ws.ports.now(), map });
  let plan: ImportPlan = planOn(ws.ledger);
  const by = how.by;
  const written = await write(
    ws,
    (ledger) => {
      plan = planOn(ledger);
      return by === undefined ? plan.entries : plan.entries.map((draft) => ({ ...draft, by: draft.by ?? by }));
    },
    { dryRun: how.dryRun || plan.entries.length === 0 },
  );
  // the first entry says that an import follows; the rows are what was imported
  const entries = written.receipts.slice(1).map((r) => r.seq);
  const [first, last] = [entries[0], entries.at(-1)];
  const { columns, ignored, rows, chambers, skipped, notes } = plan;
  return {
    document: {
      imported: entries.length,
      entries: entries.length === 0 ? null : { first, last },
      rows,
      skipped,
      columns,
      ignored,
      chambers,
      notes,
    },
    text: `${plan.text}\n${how.dryRun ? "dry run: nothing was imported" : entries.length === 0 ? "nothing new: nothing was imported" : entries.length === 1 ? `imported 1 entry, #${first}` : `imported ${entries.length} entries, #${first} to #${last}`}`,
    notices: written.notices,
  };
}
