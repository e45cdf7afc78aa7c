/** Making a line folder: a blank one with a commented line file, or the demo line with its invented history. */
import { refuse } from "../../engine/index.ts";
import { blankLine, DEMO_LINE } from "../line/template.ts";
import type { Ports } from "../ports.ts";
import { replaceFile } from "../record/atomic-replace.ts";
import type { AnyDraft } from "../record/entries.ts";
import { fileRefusal } from "../record/file-trouble.ts";
import { demoEntries } from "../rehearsal/demo.ts";
import { writeViews } from "./views.ts";
import { LINE_FILE, Workspace } from "./workspace.ts";
import { write } from "./writing.ts";

/** Makes DIR a line folder. Refuses `line-exists` where it is one already; other files there are left alone. */
export async function createLine(
  folder: string,
  ports: Ports,
  how: { demo: boolean; timeZone: string; scratch?: boolean },
): Promise<Workspace> {
  const path = `${folder}/${LINE_FILE}`;
  if (ports.files.exists(path))
    refuse("line-exists", `${folder} already holds a ${LINE_FILE}`, { hint: "name an empty folder" });
  try {
    ports.files.makeFolder(folder);
  } catch (error) {
    throw fileRefusal(error, `make the folder ${folder}`, folder);
  }
  const name =
    folder
      .replace(/[/\\]+$/, "")
      .split(/[/\\]/)
      .at(-1) ?? "line";
  const text = how.demo ? DEMO_LINE : blankLine(name, how.timeZone);
  replaceFile(ports, path, new TextEncoder().encode(text), null);
  const ws = new Workspace(folder, ports, how.scratch ?? false);
  if (!how.demo) {
    await write(ws, () => []);
    return ws;
  }
  const drafts: AnyDraft[] = [
    { kind: "line", data: { line: ws.line.name, created_by: "coatwright", line_file: text } },
    ...demoEntries(ws.wafer),
  ];
  await ws.book.write(() => drafts);
  writeViews(ws);
  return ws;
}
