/**
 * The one place where YAML is read: options, limits, and the place of every key and value by row and column. Every file
 * that people edit (line.yaml, a stack file, an import map) comes through `readYaml`; what its content must be is a
 * schema's business (`shape.ts`).
 *
 * YAML 1.2 core schema; strict; string keys; no aliases, anchors, tags, merge keys or directives; at most 1 MB,
 * 20 levels, 500 keys a map. Warnings are errors. Numbers stay as they are spelled ("0.003", "012"), so that one grammar
 * (`engine/quantity.ts`) reads every quantity.
 */
import { type Document, isAlias, isMap, isScalar, isSeq, LineCounter, type Node, parseDocument } from "yaml";
import { type Problem, Refusal } from "../../engine/index.ts";
import { gluedKey, mistakeInMap, syntaxProblem } from "./yaml-mistakes.ts";

/** A value as read: text (numbers as spelled), true/false, null, list or map. Maps are plain objects. */
export type YamlValue = string | boolean | null | YamlValue[] | { [key: string]: YamlValue };

/** Keys and list positions from the root. */
export type YamlPath = readonly (string | number)[];

/** A YAML file after reading: its content, and where everything stands. */
export interface YamlFile {
  file: string;
  root: YamlValue;
  /** Mistakes that left the rest readable. The content at and below `spoilt` paths must not be judged again. */
  problems: Problem[];
  /** A problem at the value of this path, or at its key; the nearest enclosing place when the path is absent. */
  problem(path: YamlPath, code: string, message: string, hint?: string, at?: "value" | "key"): Problem;
  /** Has this path (or one above or below it) already been reported? */
  spoilt(path: YamlPath): boolean;
}

const LIMIT_BYTES = 1_000_000;
const LIMIT_DEPTH = 20;
const LIMIT_KEYS = 500;
/** Commas, colons, brackets, dashes and line ends; bounds the time to parse a hostile file to under half a second. */
const LIMIT_MARKS = 30_000;
const POISONED_KEYS = ["__proto__", "constructor", "prototype"];

/** Decodes UTF-8 (with or without byte-order mark). Throws `not-utf8`, `file-too-large`, with the place. */
export function textOf(source: Uint8Array | string, file: string): string {
  const size = typeof source === "string" ? Buffer.byteLength(source) : source.length;
  if (size > LIMIT_BYTES) {
    const message = `the file has ${size} bytes, at most ${LIMIT_BYTES} are read`;
    throw new Refusal([{ code: "file-too-large", message, file, row: 1, column: 1 }]);
  }
  if (typeof source === "string") return source.replace(/^\ufeff/, "");
  try {
    return new TextDecoder("utf-8", { fatal: true }).decode(source);
  } catch {
    // decode again, leniently, only to find the row of the first byte that is wrong
    const before = new TextDecoder().decode(source).split("\ufffd")[0].split("\n");
    const place = { file, row: before.length, column: before[before.length - 1].length + 1 };
    const hint = "save the file as UTF-8";
    throw new Refusal([{ code: "not-utf8", message: "the file is not UTF-8 text", ...place, hint }]);
  }
}

/** Reads one YAML document. Throws a Refusal with every problem that prevents reading; see `YamlFile` for the others. */
export function readYaml(source: Uint8Array | string, file: string): YamlFile {
  const text = textOf(source, file);
  refuseUnreadable(text, file);
  const lines = new LineCounter();
  const document = parseDocument(text, {
    version: "1.2",
    schema: "core",
    strict: true,
    // duplicates are found below instead: the library's own check takes quadratic time
    uniqueKeys: false,
    stringKeys: true,
    merge: false,
    resolveKnownTags: false,
    prettyErrors: false,
    lineCounter: lines,
    // nothing is printed by parseDocument at this level, and "silent" would also drop the error on a second document
    logLevel: "error",
  });
  const place = (offset: number) => {
    const { line, col } = lines.linePos(Math.max(0, offset));
    return { file, row: Math.max(1, line), column: Math.max(1, col) };
  };
  const syntax = [...document.errors, ...document.warnings];
  if (syntax.length > 0) {
    const problems = syntax.map((error) => {
      const { offset, ...what } = syntaxProblem(error.code, error.message, text, error.pos[0]);
      return { ...what, ...place(offset) };
    });
    throw new Refusal(withoutRepeats(problems));
  }
  if (document.contents === null || (isScalar(document.contents) && document.contents.value === null)) {
    throw new Refusal([{ code: "empty-file", message: "the file is empty", file, row: 1, column: 1 }]);
  }
  if (isScalar(document.contents)) {
    const glued = gluedKey(String(document.contents.value));
    if (glued) throw new Refusal([{ ...glued, ...place(document.contents.range[0]) }]);
  }
  return new Walk(document as Document.Parsed, text, file, place).result();
}

/** Refuses what the parser would take long over or explain badly. */
function refuseUnreadable(text: string, file: string): void {
  const at = (offset: number) => {
    const before = text.slice(0, offset).split(/\r\n|\r|\n/);
    return { file, row: before.length, column: before[before.length - 1].length + 1 };
  };
  const lone = /\r(?!\n)/.exec(text);
  if (lone) {
    const hint = "save the file with line ends LF or CRLF";
    const message = "the file has old Mac line ends (a lone carriage return)";
    throw new Refusal([{ code: "line-ends", message, ...at(lone.index), hint }]);
  }
  const directive = /^%.*$/m.exec(text);
  if (directive && text.slice(0, directive.index).trim() === "") {
    const problem = { code: "directive", message: "a line beginning with % is not allowed here" };
    throw new Refusal([{ ...problem, ...at(directive.index) }]);
  }
  let marks = 0;
  for (let i = 0; i < text.length; i++) {
    if (",:[]{}-?\n".includes(text[i]) && ++marks > LIMIT_MARKS) {
      const message = `the file has more than ${LIMIT_MARKS} keys, items and lines`;
      throw new Refusal([{ code: "file-too-large", message, ...at(i) }]);
    }
  }
}

/** The first problem of each row: a broken row often gives several errors of the parser, and the first tells most. */
function withoutRepeats(problems: Problem[]): Problem[] {
  return problems.filter(({ row }, i) => problems.findIndex((other) => other.row === row) === i);
}

/** Walks the tree once: plain values, places, limits, and the mistakes that YAML itself accepts. */
class Walk {
  private readonly problems: Problem[] = [];
  private readonly spoiltPaths: YamlPath[] = [];
  private readonly values = new Map<string, number>();
  private readonly keys = new Map<string, number>();
  constructor(
    private readonly document: Document.Parsed,
    private readonly text: string,
    private readonly file: string,
    private readonly place: (offset: number) => { file: string; row: number; column: number },
  ) {}

  result(): YamlFile {
    const root = this.read(this.document.contents as Node | null, [], 0);
    const { file, problems, spoiltPaths, values, keys, place } = this;
    return {
      file,
      root,
      problems,
      problem: (path, code, message, hint, at = "value") => {
        const offset = nearestPlace(path, at === "key" ? keys : values, values);
        return { code, message, ...place(offset), ...(hint === undefined ? {} : { hint }) };
      },
      spoilt: (path) =>
        spoiltPaths.some((bad) => {
          const shared = Math.min(bad.length, path.length);
          return bad.slice(0, shared).every((part, i) => part === path[i]);
        }),
    };
  }

  private report(offset: number, code: string, message: string, hint?: string): void {
    this.problems.push({ code, message, ...this.place(offset), ...(hint === undefined ? {} : { hint }) });
  }

  private read(node: Node | null, path: YamlPath, depth: number): YamlValue {
    const offset = node?.range?.[0] ?? this.values.get(pathKey(path)) ?? 0;
    this.values.set(pathKey(path), offset);
    if (depth > LIMIT_DEPTH) {
      this.spoiltPaths.push(path);
      this.report(offset, "too-deep", `more than ${LIMIT_DEPTH} levels are nested here`);
      return null;
    }
    if (node === null) return null;
    const refusal = notRead(node);
    if (refusal) {
      this.spoiltPaths.push(path);
      this.report(offset, refusal.code, refusal.message, refusal.hint);
      return null;
    }
    if (isScalar(node)) return scalarValue(node.value, node.source);
    if (isSeq(node)) return node.items.map((item, i) => this.read(item as Node | null, [...path, i], depth + 1));
    return isMap(node) ? this.readMap(node, path, depth) : null;
  }

  private readMap(node: Extract<Node, { items: { key: unknown }[] }>, path: YamlPath, depth: number): YamlValue {
    const map: { [key: string]: YamlValue } = {};
    const seen = new Map<string, number>();
    if (node.items.length > LIMIT_KEYS) {
      this.spoiltPaths.push(path);
      this.report(node.range?.[0] ?? 0, "too-many-keys", `more than ${LIMIT_KEYS} keys stand in one map here`);
      return null;
    }
    const mistakes = mistakeInMap(node as never, this.text);
    for (const { offset, code, message, hint, spoils } of mistakes.found) {
      this.report(offset, code, message, hint);
      for (const key of spoils) this.spoiltPaths.push([...path, key]);
    }
    for (const [i, item] of node.items.entries()) {
      if (mistakes.skip.has(i)) continue;
      const keyNode = item.key as Node & { value?: unknown };
      const key = String(keyNode.value ?? "");
      const offset = keyNode.range?.[0] ?? 0;
      const below = [...path, key];
      if (POISONED_KEYS.includes(key) || key === "<<") {
        this.spoiltPaths.push(below);
        const code = key === "<<" ? "merge-key" : "reserved-key";
        this.report(offset, code, `the key ${key} is not allowed`, key === "<<" ? "write the keys out" : undefined);
        continue;
      }
      const first = seen.get(key);
      if (first !== undefined) {
        const { row, column } = this.place(first);
        this.report(offset, "duplicate-key", `"${key}" stands twice, first in row ${row}, column ${column}`);
        continue;
      }
      seen.set(key, offset);
      this.keys.set(pathKey(below), offset);
      this.values.set(pathKey(below), offset);
      map[key] = this.read((item.value ?? null) as Node | null, below, depth + 1);
    }
    return map;
  }
}

/** What YAML offers and these files do without, because a reader of the file must see each value where it stands. */
function notRead(node: Node): { code: string; message: string; hint: string } | null {
  if (isAlias(node)) return { code: "alias", message: "references (*name) are not read here", hint: "write it out" };
  if ("anchor" in node && node.anchor) {
    return { code: "alias", message: "anchors (&name) are not read here", hint: "leave the anchor out" };
  }
  if (!node.tag) return null;
  return { code: "tag", message: `tags such as ${node.tag} are not read here`, hint: "write the value without it" };
}

function scalarValue(value: unknown, source: string | undefined): YamlValue {
  if (value === null || typeof value === "boolean" || typeof value === "string") return value;
  return source ?? String(value);
}

const pathKey = (path: YamlPath): string => JSON.stringify(path);

/** Offset of the path, else of the nearest place above it. */
function nearestPlace(path: YamlPath, first: Map<string, number>, then: Map<string, number>): number {
  const exact = first.get(pathKey(path));
  if (exact !== undefined) return exact;
  for (let length = path.length; length >= 0; length--) {
    const offset = then.get(pathKey(path.slice(0, length)));
    if (offset !== undefined) return offset;
  }
  return 0;
}
