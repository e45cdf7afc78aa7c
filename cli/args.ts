/**
 * What a verb was called with, the same for a command line and for a JSON request: words by their name, flags without
 * their dashes. Strings stay strings; a JSON request may give numbers, booleans, lists and objects.
 */
import { parseArgs } from "node:util";
import { nearestWord, refuse } from "../engine/index.ts";
import type { Verb } from "./verbs/verb.ts";

export class Args {
  constructor(private readonly values: ReadonlyMap<string, unknown>) {}

  has(name: string): boolean {
    return this.values.get(name) !== undefined;
  }

  /** Text, or undefined; a number given in JSON is taken as its digits. */
  text(name: string): string | undefined {
    const value = this.values.get(name);
    if (value === undefined || value === null) return undefined;
    if (typeof value === "string") return value;
    if (typeof value === "number") return String(value);
    return refuse("bad-argument", `${name} must be text, not ${JSON.stringify(value)}`);
  }

  /** Text that must be there. */
  need(name: string): string {
    return this.text(name) ?? refuse("missing-argument", `${name} is not given`);
  }

  /** A number or text with a unit, as given. */
  given(name: string): string | number | undefined {
    const value = this.values.get(name);
    if (value === undefined || value === null) return undefined;
    if (typeof value === "string" || typeof value === "number") return value;
    return refuse("bad-argument", `${name} must be a number or text with a unit, not ${JSON.stringify(value)}`);
  }

  switch(name: string): boolean {
    const value = this.values.get(name);
    if (value === undefined || value === false) return false;
    if (value === true || value === "true") return true;
    return refuse("bad-argument", `${name} is true or false, not ${JSON.stringify(value)}`);
  }

  /** `set`: a list of "k=v" from the command line, or an object from JSON. */
  settings(name: string): readonly string[] | Record<string, string | number | { value: number; unit: string }> {
    const value = this.values.get(name);
    if (value === undefined || value === null) return [];
    if (typeof value === "string") return [value];
    if (Array.isArray(value) && value.every((v) => typeof v === "string")) return value as string[];
    if (typeof value === "object" && !Array.isArray(value)) {
      for (const [key, one] of Object.entries(value as object)) {
        const quantity =
          typeof one === "object" &&
          one !== null &&
          typeof (one as { value?: unknown }).value === "number" &&
          typeof (one as { unit?: unknown }).unit === "string";
        if (typeof one !== "string" && typeof one !== "number" && !quantity)
          refuse("bad-argument", `${name}.${key} must be text with a unit, a number, or {value, unit}`);
      }
      return value as Record<string, string | number>;
    }
    return refuse("bad-argument", `${name} must be an object of settings, or a list of k=v`);
  }
}

/** Flags every verb takes; the last three only writing verbs. */
const everywhere = ["line", "json", "help"];
const writing = ["at", "by", "dry-run"];

/** Arguments from the words after a verb. Refuses unknown flags (with the nearest), missing and superfluous words. */
export function argsFromWords(verb: Verb, argv: readonly string[]): Args {
  const known = new Map<string, { type: "string" | "boolean"; multiple?: boolean }>();
  for (const flag of verb.flags)
    known.set(flag.name, { type: flag.kind === "switch" ? "boolean" : "string", multiple: flag.kind === "settings" });
  for (const name of everywhere) known.set(name, { type: name === "line" ? "string" : "boolean" });
  for (const name of verb.writes ? writing : []) known.set(name, { type: name === "dry-run" ? "boolean" : "string" });
  for (const name of ["no-color", "ascii"]) known.set(name, { type: "boolean" });
  const { tokens } = parseArgs({
    args: [...argv],
    options: Object.fromEntries(known),
    strict: false,
    tokens: true,
    allowPositionals: true,
  });
  const values = new Map<string, unknown>();
  const positionals: string[] = [];
  for (const token of tokens) {
    if (token.kind === "positional") positionals.push(token.value);
    if (token.kind !== "option") continue;
    const { name, value, rawName } = token;
    const shape = known.get(name);
    if (!shape) {
      if (/^\d|^\.\d/.test(name))
        refuse("negative-number", `${rawName} looks like a negative number; no reading is negative`);
      const near = nearestWord(name, known.keys());
      refuse("unknown-flag", `${rawName} is not a flag of ${verb.name}`, {
        hint: near ? `did you mean --${near}?` : `coatwright ${verb.name} --help lists them`,
      });
    }
    if (shape.type === "boolean" && value !== undefined) refuse("bad-argument", `${rawName} takes no value`);
    if (shape.type === "string" && value === undefined) refuse("missing-value", `${rawName} needs a value`);
    if (shape.type === "string" && !token.inlineValue && value?.startsWith("--"))
      refuse("missing-value", `${rawName} needs a value, not ${value}`);
    if (shape.multiple) values.set(name, [...((values.get(name) as string[]) ?? []), value]);
    else if (values.has(name)) refuse("given-twice", `${rawName} is given twice`);
    else values.set(name, value ?? true);
  }
  takeWords(verb, positionals, values);
  return new Args(values);
}

function takeWords(verb: Verb, positionals: string[], values: Map<string, unknown>): void {
  verb.words.forEach((word, i) => {
    const value = positionals[i];
    if (value !== undefined) {
      if (values.has(word.name)) refuse("given-twice", `${word.name} is given as a word and as --${word.name}`);
      values.set(word.name, value);
    } else if (word.needed && !values.has(word.name) && !values.has("help")) {
      refuse("missing-argument", `${verb.name} needs ${word.name.toUpperCase()}`, { hint: usage(verb) });
    }
  });
  if (verb.rest) {
    const more = positionals.splice(verb.words.length);
    if (more.length > 0) values.set(verb.rest.name, more);
    else if (verb.rest.needed && !values.has("help"))
      refuse("missing-argument", `${verb.name} needs ${verb.rest.name.toUpperCase()}`, { hint: usage(verb) });
  }
  const extra = positionals[verb.words.length];
  if (extra !== undefined)
    refuse("extra-word", `"${extra}" is one word too many for ${verb.name}`, {
      hint: `${usage(verb)}; a text of several words needs quotes`,
    });
  for (const flag of verb.flags)
    if (flag.needed && !values.has(flag.name) && !values.has("help"))
      refuse("missing-argument", `${verb.name} needs --${flag.name}`, { hint: usage(verb) });
}

export function usage(verb: Verb): string {
  const words = verb.words.map((w) => (w.needed ? w.name.toUpperCase() : `[${w.name.toUpperCase()}]`));
  if (verb.rest) words.push(`${verb.rest.name.toUpperCase()} ...`);
  const flags = verb.flags.filter((f) => f.needed).map((f) => `--${f.name} ${f.kind === "settings" ? "k=v" : f.shows}`);
  return ["coatwright", verb.name, ...words, ...flags].join(" ");
}

/** Arguments from a JSON request: names of words in lower case, flags with underscores for dashes. */
export function argsFromRequest(verb: Verb, given: Record<string, unknown>): Args {
  const known = [
    ...verb.words.map((w) => w.name),
    ...(verb.rest ? [verb.rest.name] : []),
    ...verb.flags.map((f) => f.name),
    ...(verb.writes ? writing : []),
  ];
  const values = new Map<string, unknown>();
  for (const [key, value] of Object.entries(given)) {
    const name = key.replaceAll("_", "-").toLowerCase();
    if (!known.includes(name)) {
      const near = nearestWord(name, known);
      refuse("unknown-argument", `"${key}" is not an argument of ${verb.name}`, {
        hint: near ? `did you mean ${near.replaceAll("-", "_")}?` : known.join(", "),
      });
    }
    values.set(name, value);
  }
  for (const part of [...verb.words, ...verb.flags])
    if (part.needed && !values.has(part.name))
      refuse("missing-argument", `${verb.name} needs "${part.name.replaceAll("-", "_")}"`);
  return new Args(values);
}
