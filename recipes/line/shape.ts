/**
 * From a schema's complaints to Problems with a place: reads one part of a YAML file against a zod schema and reports
 * everything that is wrong with it by row and column. The schemas stay free of places; this file alone joins the two.
 */
import * as z from "zod/mini";
import { nearestWord, type Problem, Refusal } from "../../engine/index.ts";
import { nameProblem, sameButCapitals } from "./names.ts";
import type { YamlFile, YamlPath, YamlValue } from "./yaml.ts";

/** A text value read by a parser that throws Refusals; numbers arrive as they were spelled. */
export function read<T>(parse: (text: string) => T) {
  return z.pipe(
    z.string(),
    z.transform((text: string, context) => {
      try {
        return parse(text);
      } catch (error) {
        if (!(error instanceof Refusal)) throw error;
        for (const { code, message, hint } of error.problems) {
          context.issues.push({ code: "custom", message, input: text, params: { code, hint } });
        }
        return z.NEVER;
      }
    }),
  );
}

/** Collects the problems of one file while it is read part by part. */
export class Reader {
  readonly problems: Problem[];
  readonly yaml: YamlFile;
  constructor(yaml: YamlFile) {
    this.yaml = yaml;
    this.problems = [...yaml.problems];
  }

  /** Reports one problem, unless that place was already reported as unreadable. */
  add(path: YamlPath, code: string, message: string, hint?: string, at: "value" | "key" = "value"): void {
    if (!this.yaml.spoilt(path)) this.problems.push(this.yaml.problem(path, code, message, hint, at));
  }

  /** Runs a parser whose Refusals belong to this path; undefined when it refused. */
  attempt<T>(path: YamlPath, parse: () => T): T | undefined {
    try {
      return parse();
    } catch (error) {
      if (!(error instanceof Refusal)) throw error;
      for (const { code, message, hint } of error.problems) this.add(path, code, message, hint);
      return undefined;
    }
  }

  /** The value at a path, undefined when there is none. */
  at(path: YamlPath): YamlValue | undefined {
    let value: YamlValue | undefined = this.yaml.root;
    for (const part of path) {
      if (typeof value !== "object" || value === null || !Object.hasOwn(value, part)) return undefined;
      value = (value as { [key: string]: YamlValue })[part];
    }
    return value;
  }

  /** Entries of the map at a path; empty (and reported) when something else stands there. Absent or null is empty. */
  entries(path: YamlPath): [string, YamlValue][] {
    const value = this.at(path);
    if (value === undefined || value === null) return [];
    if (typeof value === "object" && !Array.isArray(value)) return Object.entries(value);
    this.add(path, "wrong-type", `${path.at(-1)} must hold keys and values`, "one key: value a row, indented");
    return [];
  }

  /** Entries of a map whose keys are names that people choose; bad and clashing names are reported and left out. */
  named(path: YamlPath, what: string): [string, YamlValue][] {
    const entries = this.entries(path);
    const clashes = sameButCapitals(entries.map(([name]) => name));
    for (const { name, earlier } of clashes) {
      const message = `the ${what}s "${earlier}" and "${name}" differ only in capitals`;
      this.add([...path, name], "name-clash", message, "choose names that differ otherwise", "key");
    }
    return entries.filter(([name]) => {
      const problem = nameProblem(name);
      if (problem) this.add([...path, name], "bad-name", problem.message, problem.hint, "key");
      return problem === null && !clashes.some((clash) => clash.name === name);
    });
  }

  /** Reads the value at a path against a schema; undefined when it does not fit, with every reason reported. */
  shaped<S extends z.ZodMiniType>(schema: S, path: YamlPath): z.output<S> | undefined {
    const result = schema.safeParse(this.at(path));
    if (result.success) return this.yaml.spoilt(path) ? undefined : result.data;
    for (const issue of result.error.issues) this.translate(issue, path, schema);
    return undefined;
  }

  private translate(issue: z.core.$ZodIssue, base: YamlPath, schema: z.ZodMiniType): void {
    const path = [...base, ...(issue.path as (string | number)[])];
    const name = String(path.at(-1) ?? "the file");
    if (issue.code === "unrecognized_keys") {
      for (const key of issue.keys) this.unknownKey([...path, key], knownKeys(schema, issue.path));
    } else if (issue.code === "custom") {
      const { code, hint } = (issue.params ?? {}) as { code?: string; hint?: string };
      this.add(path, code ?? "wrong-value", `${name}: ${issue.message}`, hint);
    } else if (this.at(path) === undefined) {
      this.add(path, "missing-key", `"${name}" is missing`, missingHint(issue));
    } else if (issue.code === "invalid_value") {
      const values = issue.values.map(String);
      const near = nearestWord(String(this.at(path)), values);
      const hint = near ? `did you mean ${near}?` : undefined;
      this.add(path, "wrong-value", `${name}: ${JSON.stringify(this.at(path))} is none of ${values.join(", ")}`, hint);
    } else {
      const wanted = issue.code === "invalid_type" ? (WANTED[issue.expected] ?? issue.expected) : "another value";
      this.add(path, "wrong-type", `${name} must be ${wanted}`);
    }
  }

  /** Reports a key that is not known, with the nearest one that is. */
  unknownKey(path: YamlPath, known: readonly string[]): void {
    const key = String(path.at(-1));
    const near = nearestWord(key, known);
    const hint = near ? `did you mean ${near}?` : known.length > 0 ? `known here: ${known.join(", ")}` : undefined;
    this.add(path, "unknown-key", `"${key}" is not a key known here`, hint, "key");
  }
}

const WANTED: Record<string, string> = {
  string: "text or a number",
  boolean: "true or false",
  object: "keys and values",
  record: "keys and values",
  array: "a list, as in [ ]",
};

function missingHint(issue: z.core.$ZodIssue): string | undefined {
  return issue.code === "invalid_value" ? `one of ${issue.values.map(String).join(", ")}` : undefined;
}

/** Keys that the schema knows at a path inside it. */
function knownKeys(schema: z.ZodMiniType, path: readonly PropertyKey[]): string[] {
  let at: z.core.$ZodType | undefined = schema;
  for (const part of path) at = inner(unwrapped(at), part);
  const { def } = unwrapped(at)?._zod ?? {};
  return def?.type === "object" ? Object.keys((def as z.core.$ZodObjectDef).shape) : [];
}

function unwrapped(schema: z.core.$ZodType | undefined): z.core.$ZodType | undefined {
  let at = schema;
  while (at && "innerType" in at._zod.def) at = at._zod.def.innerType as z.core.$ZodType;
  return at;
}

function inner(schema: z.core.$ZodType | undefined, part: PropertyKey): z.core.$ZodType | undefined {
  const def = schema?._zod.def;
  if (def?.type === "object") return (def as z.core.$ZodObjectDef).shape[String(part)];
  if (def?.type === "record") return (def as z.core.$ZodRecordDef).valueType;
  return def?.type === "array" ? (def as z.core.$ZodArrayDef).element : undefined;
}
