/** The recipe views of a line folder, kept in step with the book: written after each entry, told about by `check`. */
import { Refusal } from "../../engine/index.ts";
import * as record from "../record/views.ts";
import type { Workspace } from "./workspace.ts";

const told = (path: string) =>
  `${path} was edited by hand and does not say what the book says; it is left as it is. Delete it and the next entry writes it anew; \`record recipe\` is how a change at the tool is stated.`;

/** Writes missing and outdated views. One that cannot be written is told, never fatal: the book is the truth. */
export function writeViews(ws: Workspace): string[] {
  try {
    return record.writeViews(ws.folder, ws.ports, ws.ledger).map((view) => told(view.path));
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    return [`the recipe views could not be written: ${error.message}`];
  }
}

export function editedViews(ws: Workspace): string[] {
  return record.editedViews(ws.folder, ws.ports, ws.ledger).map((view) => told(view.path));
}
