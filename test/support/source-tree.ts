/**
 * Reads the project's own source files for the tests that keep its shape: what each file imports, and its code without
 * comments. A scan by pattern, not a parser: imports here always start a line and name their module in plain quotes,
 * which the formatter guarantees.
 */
import { readdirSync, readFileSync } from "node:fs";
import { dirname, join, posix, relative, sep } from "node:path";
import { fileURLToPath } from "node:url";

/** The folder that holds package.json. */
export const PROJECT = dirname(dirname(dirname(fileURLToPath(import.meta.url))));

const LEFT_OUT = new Set(["node_modules", "dist", ".git", ".scratch", "coverage"]);

export interface SourceFile {
  /** From the project folder, with forward slashes. */
  path: string;
  text: string;
}

export interface Import {
  /** As written. */
  module: string;
  /** Only types are taken, so that nothing is loaded at run time. */
  typeOnly: boolean;
}

/** Every file below a folder of the project (the whole project when left out), in a stable order. Binary files are not expected. */
export function filesUnder(folder = ""): SourceFile[] {
  const found: SourceFile[] = [];
  const visit = (at: string): void => {
    for (const entry of readdirSync(at, { withFileTypes: true })) {
      if (LEFT_OUT.has(entry.name)) continue;
      const path = join(at, entry.name);
      if (entry.isDirectory()) visit(path);
      else if (entry.isFile() && !entry.name.endsWith(".tgz")) {
        found.push({ path: relative(PROJECT, path).split(sep).join("/"), text: readFileSync(path, "utf8") });
      }
    }
  };
  visit(join(PROJECT, folder));
  return found.sort((a, b) => (a.path < b.path ? -1 : 1));
}

/** Is it a program file? */
export function isSource(path: string): boolean {
  return /\.(ts|tsx|mjs)$/.test(path);
}

/** A string in any of the three quotes (plain ones end with their line), or a comment. */
const STRING_OR_COMMENT = /"(?:\\.|[^"\\\n])*"|'(?:\\.|[^'\\\n])*'|`(?:\\[\s\S]|[^`\\])*`|\/\*[\s\S]*?\*\/|\/\/[^\n]*/g;

/** The text without comments; line numbers are kept, and so are strings that look like comments. */
export function withoutComments(text: string): string {
  return text.replace(STRING_OR_COMMENT, (found) => (found.startsWith("/") ? found.replace(/[^\n]/g, " ") : found));
}

/** All modules a file takes from, statically, by re-export or dynamically. */
export function importsOf(text: string): Import[] {
  const code = withoutComments(text);
  const found: Import[] = [];
  for (const match of code.matchAll(/^\s*(?:import|export)\s+(type\s+)?(?:[^;"'()]*?\sfrom\s+)?["']([^"'\n]+)["']/gm)) {
    const names = match[0]
      .match(/\{([^}]*)\}/)?.[1]
      .split(",")
      .map((name) => name.trim());
    const allTypes = names?.filter(Boolean).every((name) => name.startsWith("type ")) ?? false;
    const whole = /^\s*(?:import|export)\s+\{/.test(match[0]);
    found.push({ module: match[2], typeOnly: match[1] !== undefined || (whole && allTypes) });
  }
  for (const match of code.matchAll(/\bimport\(\s*["']([^"'\n]+)["']/g)) {
    found.push({ module: match[1], typeOnly: false });
  }
  return found;
}

/** Where a relative import leads, from the project folder; null for packages and Node's own modules. */
export function target(from: string, module: string): string | null {
  return module.startsWith(".") ? posix.normalize(posix.join(posix.dirname(from), module)) : null;
}
