/**
 * Text that came from people or files, made safe to print: control and escape characters, direction overrides and
 * invisible characters are neutralised, so no name or note can move the cursor, change colours or hide a word.
 */

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

/** One line of harmless text: tabs and newlines become spaces, other controls a visible `?`, invisible signs vanish. */
export function safeText(text: string): string {
  if (/^[\u0020-\u007e]*$/.test(text)) return text;
  return text
    .replace(/\r\n|[\t\n\r\u2028\u2029]/g, " ")
    .replace(/[\u0000-\u001f\u007f-\u009f]/g, "?")
    .replace(/[\u00ad\u061c\u200b-\u200f\u202a-\u202e\u2060-\u206f\ufeff\ufff9-\ufffb]/g, "")
    .replace(/[\ud800-\udbff](?![\udc00-\udfff])|(?<![\ud800-\udbff])[\udc00-\udfff]/g, "?");
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
