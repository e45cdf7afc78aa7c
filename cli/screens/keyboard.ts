/**
 * Bytes from the terminal to single keys. One key at a time whatever the chunks were, escape sequences joined where they
 * arrive split, a paste as one event, reports of the terminal and unknown sequences dropped. Pure: who feeds it also
 * keeps the clock, and calls `flush` when nothing came for a while.
 */
import { StringDecoder } from "node:string_decoder";

export type Input = { kind: "key"; name: string; text: string } | Paste;

/** What was pasted, one line of it; `more` when there were further ones. */
export interface Paste {
  kind: "paste";
  text: string;
  more?: true;
}

const pasteStart = "\u001b[200~";
const pasteEnd = "\u001b[201~";
/** A paste longer than this is cut: a field takes a sentence, not a file. */
const longestPaste = 65_536;
/** A report without its end is given up at this length. */
const longestReport = 4096;

const finals: Readonly<Record<string, string>> = { A: "up", B: "down", C: "right", D: "left", F: "end", H: "home" };
const numbered: Readonly<Record<string, string>> = {
  1: "home",
  2: "insert",
  3: "delete",
  4: "end",
  5: "pgup",
  6: "pgdn",
  7: "home",
  8: "end",
  11: "f1",
  12: "f2",
  13: "f3",
  14: "f4",
  15: "f5",
  17: "f6",
  18: "f7",
  19: "f8",
  20: "f9",
  21: "f10",
  23: "f11",
  24: "f12",
};
const linuxConsole: Readonly<Record<string, string>> = { A: "f1", B: "f2", C: "f3", D: "f4", E: "f5" };
const singleShift: Readonly<Record<string, string>> = { ...finals, P: "f1", Q: "f2", R: "f3", S: "f4", M: "enter" };

export class KeyReader {
  private readonly decoder = new StringDecoder("utf8");
  private waiting = "";
  private pasting: string | null = null;

  /** Takes what arrived; returns the keys that are complete. */
  feed(chunk: Uint8Array | string): Input[] {
    this.waiting += typeof chunk === "string" ? chunk : this.decoder.write(Buffer.from(chunk));
    return this.drain(false);
  }

  /** Whether something incomplete is held back (a lone escape, a sequence without its end). */
  get holding(): boolean {
    return this.waiting !== "" && this.pasting === null;
  }

  /** Nothing came for a while: a lone escape was the key, anything else incomplete was no key at all. */
  flush(): Input[] {
    return this.drain(true);
  }

  private drain(final: boolean): Input[] {
    const out: Input[] = [];
    while (this.waiting !== "") {
      if (this.pasting !== null) {
        if (!this.readPaste(out)) break;
        continue;
      }
      const used = this.waiting.startsWith("\u001b") ? this.readEscape(out, final) : this.readPlain(out);
      if (used === 0) break;
      this.waiting = this.waiting.slice(used);
    }
    return out;
  }

  /** Returns whether the paste ended. */
  private readPaste(out: Input[]): boolean {
    const end = this.waiting.indexOf(pasteEnd);
    // The end mark may itself arrive split: its possible beginning stays behind.
    const safe = end >= 0 ? end : Math.max(0, this.waiting.length - (pasteEnd.length - 1));
    this.pasting = ((this.pasting ?? "") + this.waiting.slice(0, safe)).slice(0, longestPaste);
    this.waiting = this.waiting.slice(safe);
    if (end < 0) return false;
    out.push(pasted(this.pasting));
    this.pasting = null;
    this.waiting = this.waiting.slice(pasteEnd.length);
    return true;
  }

  /** One plain character; returns how much was used. */
  private readPlain(out: Input[]): number {
    const code = this.waiting.codePointAt(0) as number;
    const sign = String.fromCodePoint(code);
    const key = (name: string, text = "") => out.push({ kind: "key", name, text });
    if (code === 0x0d) key("enter");
    else if (code === 0x09) key("tab");
    else if (code === 0x7f || code === 0x08) key("backspace");
    else if (code === 0x00) key("ctrl-space");
    else if (code <= 0x1a) key(`ctrl-${String.fromCharCode(code + 96)}`);
    else if (code === 0x20) key("space", " ");
    else if (code > 0x20 && !(code >= 0x7f && code <= 0x9f) && !(code >= 0xd800 && code <= 0xdfff)) key(sign, sign);
    return sign.length;
  }

  /** One escape sequence; 0 when it is not complete yet. */
  private readEscape(out: Input[], final: boolean): number {
    const text = this.waiting;
    const key = (name: string) => out.push({ kind: "key", name, text: "" });
    if (text.length === 1) {
      if (!final) return 0;
      key("escape");
      return 1;
    }
    const kind = text[1];
    if (kind === "\u001b") {
      // Two escapes: the first was pressed alone, unless it only prefixes a sequence (alt with an arrow).
      if (text.length === 2 && !final) return 0;
      if (text[2] !== "[" && text[2] !== "O") key("escape");
      return 1;
    }
    if (kind === "[") return this.readControl(out, final);
    if (kind === "O") {
      if (text.length === 2) return final ? 2 : 0;
      const name = singleShift[text[2]];
      if (name !== undefined) key(name);
      return 3;
    }
    if ("]P_^X".includes(kind)) return reportLength(text, final);
    const sign = String.fromCodePoint(text.codePointAt(1) as number);
    if (sign > " " && sign !== "\u007f") key(`alt-${sign}`);
    else if (sign === "\r") key("alt-enter");
    else if (sign === "\u007f") key("alt-backspace");
    return 1 + sign.length;
  }

  /** A control sequence: ESC [ parameters intermediates final (ECMA-48, 5.4). */
  private readControl(out: Input[], final: boolean): number {
    const text = this.waiting;
    if (text.startsWith(pasteStart)) {
      this.pasting = "";
      return pasteStart.length;
    }
    const push = (name: string) => out.push({ kind: "key", name, text: "" });
    if (text[2] === "[") {
      if (text.length < 4) return final ? text.length : 0;
      const name = linuxConsole[text[3]];
      if (name !== undefined) push(name);
      return 4;
    }
    // Old mouse report: three bytes follow without an end mark.
    if (text[2] === "M") return text.length >= 6 ? 6 : final ? text.length : 0;
    const match = /^\u001b\[([0-?]*)([ -/]*)([@-~])/.exec(text);
    if (match === null) {
      if (/^\u001b\[[0-?]*[ -/]*$/.test(text)) return final || text.length > longestReport ? text.length : 0;
      return 2;
    }
    const [whole, parameters, , last] = match;
    const name = controlKey(parameters, last);
    if (name !== null) push(name);
    return whole.length;
  }
}

/** The key of a control sequence, or null for reports and whatever is not known. */
function controlKey(parameters: string, last: string): string | null {
  if (!/^[0-9;]*$/.test(parameters)) return null;
  const [first, second] = parameters.split(";");
  if (last === "Z") return "shift-tab";
  const name = last === "~" ? numbered[first] : parameters === "" || first === "1" ? finals[last] : undefined;
  if (name === undefined) return null;
  const bits = Math.max(0, Number(second ?? "1") - 1);
  const modifiers = `${bits & 4 ? "ctrl-" : ""}${bits & 2 ? "alt-" : ""}${bits & 1 ? "shift-" : ""}`;
  return modifiers + name;
}

/** Length of an operating-system or device string up to its end (BEL or ESC \), 0 while it is still open. */
function reportLength(text: string, final: boolean): number {
  const end = /\u0007|\u001b\\/.exec(text.slice(2));
  if (end !== null) return 2 + end.index + end[0].length;
  return final || text.length > longestReport ? text.length : 0;
}

/**
 * The first line of pasted text that is not empty: lines glued together would be a value nobody copied. Tabs become
 * spaces, other controls vanish.
 */
function pasted(text: string): Paste {
  const lines = text
    .split(/\r\n|[\r\n]/)
    .map((line) =>
      line
        .replaceAll("\t", " ")
        .replace(/[\u0000-\u001f\u007f-\u009f]/g, "")
        .trimEnd(),
    )
    .filter((line) => line !== "");
  return { kind: "paste", text: lines[0] ?? "", ...(lines.length > 1 ? { more: true } : {}) };
}
