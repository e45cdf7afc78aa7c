/**
 * The recipe views: `recipes/<recipe>/<chamber>.yaml` says in a file that people can open, compare and keep under version
 * control what a chamber runs. The book is the truth; a view is written from it, wholly, and one that was edited by hand
 * is noticed, because it is none of the texts the book ever gave.
 */
import { refuse } from "../../engine/index.ts";
import type { Ports } from "../ports.ts";
import { replaceFile } from "./atomic-replace.ts";
import { canonicalText } from "./canonical.ts";
import type { Quantity, StepSettings } from "./entries.ts";
import { errorCode, fileRefusal, folderOf, inFolder } from "./file-trouble.ts";
import { changeId } from "./ids.ts";
import type { Ledger } from "./ledger.ts";
import { differences, type RecipeVersion, versionsOf } from "./versions.ts";

/** Names become file names: ASCII, no path tricks. The line file refuses others already; the book may be older. */
const FILE_NAME = /^[A-Za-z0-9][A-Za-z0-9._-]{0,63}$/;

/** A recipe in a chamber, with its view. */
export interface View {
  chamber: string;
  recipe: string;
  /** Relative to the line folder. */
  path: string;
  text: string;
}

export type ViewState = "as the book gives it" | "missing" | "outdated" | "edited by hand";

const isFileName = (name: string): boolean => FILE_NAME.test(name) && !name.includes("..");

/** Path of a view in the line folder. Throws `bad-name`. */
export function viewPath(chamber: string, recipe: string): string {
  for (const name of [chamber, recipe]) {
    if (!isFileName(name)) {
      refuse("bad-name", `"${name}" cannot be part of a file name`, { hint: "letters, digits, . _ - only" });
    }
  }
  return `recipes/${recipe}/${chamber}.yaml`;
}

const quantity = ({ value, unit }: Quantity): string => (unit === "" ? String(value) : `${value} ${unit}`);

/** A YAML scalar for free text: JSON's double-quoted strings are YAML's, and have no raw control characters here. */
const scalar = (text: string): string => (FILE_NAME.test(text) && !/^[\d.+-]/.test(text) ? text : canonicalText(text));

function settingLines(steps: readonly StepSettings[], indent: string): string[] {
  if (steps.length === 1 && steps[0].name === undefined) {
    return [`${indent}settings:`, ...pairs(steps[0].settings, `${indent}  `)];
  }
  return [
    `${indent}steps:`,
    ...steps.flatMap((step) => [
      `${indent}  - name: ${scalar(step.name ?? "")}`,
      `${indent}    settings:`,
      ...pairs(step.settings, `${indent}      `),
    ]),
  ];
}

const pairs = (settings: Record<string, Quantity>, indent: string): string[] =>
  Object.entries(settings).map(([name, value]) => `${indent}${scalar(name)}: ${scalar(quantity(value))}`);

function origin(version: RecipeVersion): string {
  const how = version.change === null ? "stated" : `entered as change ${changeId(version.change)}`;
  return `${version.seq}  # ${how}`;
}

/** Text of the view of `version`, with the one before it. */
function textOf(chamber: string, version: RecipeVersion, before: RecipeVersion | undefined): string {
  const { recipe } = version;
  const lines = [
    `# What chamber ${chamber} runs under the recipe ${recipe}.`,
    "# Written by coatwright from book.jsonl and written anew whenever that changes; edits here are not read.",
    "# When something was changed at the tool, say so with:",
    `#   coatwright record recipe --chamber ${chamber} --recipe ${recipe} --set NAME=VALUE --reason TEXT`,
    `chamber: ${scalar(chamber)}`,
    `recipe: ${scalar(recipe)}`,
    `since: ${version.at}`,
    `by: ${scalar(version.by)}`,
    `entry: ${origin(version)}`,
    ...(version.reason === null ? [] : [`reason: ${scalar(version.reason)}`]),
    ...settingLines(version.steps, ""),
  ];
  if (!before) return `${lines.join("\n")}\n`;
  const moved = differences(before.steps, version.steps);
  lines.push(
    "before:",
    `  since: ${before.at}`,
    `  by: ${scalar(before.by)}`,
    `  entry: ${origin(before)}`,
    moved.length === 0 ? "  changed: {}" : "  changed:",
    ...moved.map((one) => `    ${scalar(one.setting)}: ${scalar(one.before ? quantity(one.before) : "none")}`),
  );
  return `${lines.join("\n")}\n`;
}

/** The views of a ledger: one for every recipe that was ever stated or entered in a chamber. */
export function viewsOf(ledger: Ledger): View[] {
  return [...ledger.chambers.values()].flatMap((record) =>
    [...record.versions].flatMap(([recipe, versions]) => {
      const last = versions.at(-1);
      // A book may be older than the rule for names: such a recipe has no view, and never a path out of the folder.
      if (!last || !isFileName(record.chamber) || !isFileName(recipe)) return [];
      const { chamber } = record;
      return [{ chamber, recipe, path: viewPath(chamber, recipe), text: textOf(chamber, last, versions.at(-2)) }];
    }),
  );
}

/** Names in the book that cannot be part of a path and so have no view: each with the first entry that uses it. */
export function namesWithoutView(ledger: Ledger): { what: "chamber" | "recipe"; name: string; entry: number }[] {
  const found = new Map<string, { what: "chamber" | "recipe"; name: string; entry: number }>();
  const tell = (what: "chamber" | "recipe", name: string, entry: number): void => {
    const key = `${what} ${name}`;
    if (!isFileName(name) && entry < (found.get(key)?.entry ?? Number.POSITIVE_INFINITY))
      found.set(key, { what, name, entry });
  };
  for (const { chamber, timeline } of ledger.chambers.values()) {
    for (const event of timeline) {
      tell("chamber", chamber, event.seq);
      if (event.kind === "run" || event.kind === "version") tell("recipe", event.recipe, event.seq);
    }
  }
  return [...found.values()];
}

/** How the view on disk compares: the text the book gives now, one it gave before, or neither. Line ends do not count. */
export function viewState(folder: string, ports: Pick<Ports, "files">, ledger: Ledger, view: View): ViewState {
  let found: string;
  try {
    found = Buffer.from(ports.files.read(inFolder(folder, view.path))).toString("utf8");
  } catch (error) {
    if (["ENOENT", "ENOTDIR"].includes(errorCode(error))) return "missing";
    throw fileRefusal(error, `read ${view.path}`, view.path);
  }
  const plain = found.replace(/\r\n/g, "\n");
  if (plain === view.text) return "as the book gives it";
  const versions = versionsOf(ledger, view.chamber, view.recipe);
  const old = versions.some((version, i) => textOf(view.chamber, version, versions[i - 1]) === plain);
  return old ? "outdated" : "edited by hand";
}

/** Views that were edited by hand. */
export function editedViews(folder: string, ports: Pick<Ports, "files">, ledger: Ledger): View[] {
  return viewsOf(ledger).filter((view) => viewState(folder, ports, ledger, view) === "edited by hand");
}

/**
 * Writes the views that are missing or outdated, and returns the ones edited by hand, which are left as they are unless
 * `overwrite`. Throws `disk-full`, `read-only`, `io-error`.
 */
export function writeViews(folder: string, ports: Ports, ledger: Ledger, overwrite = false): View[] {
  const edited: View[] = [];
  for (const view of viewsOf(ledger)) {
    const state = viewState(folder, ports, ledger, view);
    if (state === "as the book gives it") continue;
    if (state === "edited by hand" && !overwrite) {
      edited.push(view);
      continue;
    }
    const path = inFolder(folder, view.path);
    try {
      if (!ports.files.isFolder(folderOf(path))) ports.files.makeFolder(folderOf(path));
    } catch (error) {
      throw fileRefusal(error, `make ${folderOf(view.path)}`, view.path);
    }
    replaceFile(ports, path, Buffer.from(view.text, "utf8"));
  }
  return edited;
}
