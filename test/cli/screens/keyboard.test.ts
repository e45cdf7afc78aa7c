import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { type Input, KeyReader } from "../../../cli/screens/keyboard.ts";

/** Names of keys; a paste as "paste:text". The end of `chunks` counts as a pause. */
function read(...chunks: (string | Uint8Array)[]): string[] {
  const reader = new KeyReader();
  const out: Input[] = chunks.flatMap((chunk) => reader.feed(chunk));
  out.push(...reader.flush());
  return out.map((input) => (input.kind === "paste" ? `paste:${input.text}` : input.name));
}

describe("keys one at a time", () => {
  // Sequences: ECMA-48 (CSI, SS3), xterm's control sequences document (modifiers, function keys, mouse, paste brackets).
  test.each<[string, string[], string[]]>([
    ["three letters in one chunk are three keys", ["jjk"], ["j", "j", "k"]],
    ["two backspaces in one chunk are two", ["\u007f\u007f"], ["backspace", "backspace"]],
    ["0x08 is a backspace too", ["\b"], ["backspace"]],
    ["the delete key is not a backspace", ["\u001b[3~"], ["delete"]],
    ["an arrow split after the escape is one arrow", ["\u001b", "[A"], ["up"]],
    ["an arrow split inside is one arrow", ["\u001b[", "1;2", "D"], ["shift-left"]],
    ["a lone escape is the key, after the pause", ["\u001b"], ["escape"]],
    ["two escapes are two keys", ["\u001b\u001b"], ["escape", "escape"]],
    ["a paste is one event", ["\u001b[200~hello q\u001b[201~x"], ["paste:hello q", "x"]],
    ["a paste in pieces, its end mark split, is one event", ["\u001b[200~ab", "c\u001b[2", "01~"], ["paste:abc"]],
    ["a paste of several lines is its first, and no enter", ["\u001b[200~\nyes\r\nno\r\u001b[201~"], ["paste:yes"]],
    ["controls in a paste vanish", ["\u001b[200~a\u0007\u001b[31mb\u001b[201~"], ["paste:a[31mb"]],
    ["focus reports are no keys", ["\u001b[I\u001b[Oa"], ["a"]],
    ["mouse reports are no keys", ["\u001b[<0;10;5M\u001b[<0;10;5ma"], ["a"]],
    ["an old mouse report takes its three bytes along", ["\u001b[M !!a"], ["a"]],
    ["cursor and device reports are no keys", ["\u001b[12;40R\u001b[?62;22c\u001b[>1;10;0ca"], ["a"]],
    ["colour reports are no keys, either end", ["\u001b]11;rgb:ff/ff/ff\u0007\u001b]11;rgb:0/0/0\u001b\\a"], ["a"]],
    ["unknown sequences are dropped", ["\u001b[25~\u001b[99~\u001b[?1;2;3za"], ["a"]],
    ["function keys in both spellings", ["\u001bOP\u001b[11~\u001b[[A\u001b[24~"], ["f1", "f1", "f1", "f12"]],
    [
      "home and end in four spellings",
      ["\u001b[H\u001b[1~\u001bOH\u001b[7~\u001b[F\u001b[4~"],
      ["home", "home", "home", "home", "end", "end"],
    ],
    ["paging and insert", ["\u001b[5~\u001b[6~\u001b[2~"], ["pgup", "pgdn", "insert"]],
    [
      "modified arrows",
      ["\u001b[1;5C\u001b[1;2C\u001b[1;3C\u001b[1;6C"],
      ["ctrl-right", "shift-right", "alt-right", "ctrl-shift-right"],
    ],
    ["tab both ways", ["\t\u001b[Z"], ["tab", "shift-tab"]],
    ["control letters", ["\u0003\u000c\u001a"], ["ctrl-c", "ctrl-l", "ctrl-z"]],
    ["ctrl-space has its own name", ["\u0000"], ["ctrl-space"]],
    ["alt with a letter", ["\u001bx"], ["alt-x"]],
    ["letters beyond ASCII", ["é漢😀"], ["é", "漢", "😀"]],
    ["a sequence that never ends is dropped at the pause", ["\u001b[1;"], []],
  ])("%s", (_title, chunks, keys) => {
    expect(read(...chunks)).toEqual(keys);
  });

  test("a letter split between its bytes is one letter", () => {
    const bytes = Buffer.from("é");
    expect(read(bytes.subarray(0, 1), bytes.subarray(1))).toEqual(["é"]);
  });

  test("however the bytes are cut into chunks, the keys are the same", () => {
    const parts = [
      "j",
      "\u001b[A",
      "\u001b[1;2D",
      "\u001b[200~a b\u001b[201~",
      "é",
      "\u001b]11;rgb:1/2/3\u0007",
      "\u001bOP",
      "\u007f",
      "\u001b[<0;1;1M",
    ];
    fc.assert(
      fc.property(
        fc.array(fc.constantFrom(...parts), { maxLength: 8 }),
        fc.array(fc.nat(40), { maxLength: 6 }),
        (list, cuts) => {
          const bytes = Buffer.from(list.join(""));
          const at = [...new Set(cuts.map((cut) => Math.min(cut, bytes.length)))].sort((a, b) => a - b);
          const chunks = [0, ...at].map((from, i) => bytes.subarray(from, at[i] ?? bytes.length));
          expect(read(...chunks)).toEqual(read(bytes));
        },
      ),
      { seed: 7, numRuns: 300 },
    );
  });

  test("a paste is cut at 64 kB", () => {
    const [paste] = new KeyReader().feed(`\u001b[200~${"x".repeat(200_000)}\u001b[201~`);
    expect(paste.kind === "paste" && paste.text.length).toBe(65_536);
  });

  test("an escape is held back only until the pause", () => {
    const reader = new KeyReader();
    expect(reader.feed("\u001b")).toEqual([]);
    expect(reader.holding).toBe(true);
    expect(reader.flush()).toHaveLength(1);
    expect(reader.holding).toBe(false);
  });
});
