/**
 * A line of text being typed: the few motions people expect, as pure functions.
 */
import type { Input } from "./keyboard.ts";

export interface TextField {
  text: string;
  /** Cursor, in code points from the start. */
  at: number;
}

export const emptyField: TextField = { text: "", at: 0 };

/** Longest text a field takes; a reason is a sentence or two. */
const longest = 500;

/** The field after a key or a paste, or null when the key means nothing to a field. */
export function typed(field: TextField, input: Input): TextField | null {
  const signs = [...field.text];
  const { at } = field;
  const put = (text: string): TextField => {
    const added = [...text].slice(0, Math.max(0, longest - signs.length));
    return { text: [...signs.slice(0, at), ...added, ...signs.slice(at)].join(""), at: at + added.length };
  };
  const without = (from: number, to: number): TextField => ({
    text: [...signs.slice(0, from), ...signs.slice(to)].join(""),
    at: from,
  });
  if (input.kind === "paste") return put(input.text);
  if (input.text !== "") return put(input.text);
  switch (input.name) {
    case "backspace":
      return at > 0 ? without(at - 1, at) : field;
    case "delete":
    case "ctrl-d":
      return at < signs.length ? without(at, at + 1) : field;
    case "left":
    case "ctrl-b":
      return { ...field, at: Math.max(0, at - 1) };
    case "right":
    case "ctrl-f":
      return { ...field, at: Math.min(signs.length, at + 1) };
    case "home":
    case "ctrl-a":
      return { ...field, at: 0 };
    case "end":
    case "ctrl-e":
      return { ...field, at: signs.length };
    case "ctrl-u":
      return without(0, at);
    case "ctrl-k":
      return { text: signs.slice(0, at).join(""), at };
    case "ctrl-w":
    case "alt-backspace": {
      const head = signs.slice(0, at).join("").trimEnd();
      return without([...head.slice(0, head.lastIndexOf(" ") + 1)].length, at);
    }
    default:
      return null;
  }
}
