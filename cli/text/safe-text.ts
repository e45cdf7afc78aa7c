/**
 * Text that came from people or files, made safe for a screen by the same rule as reports (no name or note can move the
 * cursor, change colours or hide a word), and its twin in plain ASCII.
 */
import { safeText as harmless } from "../../recipes/index.ts";

const ascii: Readonly<Record<string, string>> = {
  "±": "+/-",
  µ: "u",
  μ: "u",
  "²": "2",
  "³": "3",
  "°": " deg",
  "×": "x",
  "→": "->",
  "–": "-",
  "—": "-",
  "−": "-",
  "…": "...",
  "≤": "<=",
  "≥": ">=",
  Å: "A",
  λ: "lambda",
  Ω: "Ohm",
  "“": '"',
  "”": '"',
  "‘": "'",
  "’": "'",
  "·": ".",
  "▸": ">",
  "◂": "<",
  "●": "O",
  "◆": "X",
  "─": "-",
  "│": "|",
  "░": ":",
};

/** One line of harmless text for a screen: tabs and newlines become spaces, what could act on a terminal a visible escape. */
export function safeText(text: string): string {
  if (/^[\u0020-\u007e]*$/.test(text)) return text;
  return harmless(text.replace(/\r\n|[\t\n\r\u2028\u2029]/g, " "));
}

/** The same in plain ASCII: known signs spelled out, accents dropped, anything else `?`. */
export function asciiText(text: string): string {
  const safe = safeText(text);
  if (/^[\u0020-\u007e]*$/.test(safe)) return safe;
  let out = "";
  for (const sign of safe) {
    if (sign <= "~") out += sign;
    else if (ascii[sign] !== undefined) out += ascii[sign];
    else {
      const bare = sign.normalize("NFD").replace(/[\u0300-\u036f]/g, "");
      out += /^[\u0020-\u007e]+$/.test(bare) ? bare : "?";
    }
  }
  return out;
}
