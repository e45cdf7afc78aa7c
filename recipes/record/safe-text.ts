/**
 * Text that people, files or other programs wrote, made fit to be shown: nothing in it can move a cursor, colour a word,
 * set a title, hide, or turn the order of what is read. What could is shown as a visible escape, so that it is seen and
 * not silently gone: ESC becomes \x1b, a right-to-left override \u202e.
 *
 * For screens, plain output and reports alike. The record itself keeps what was typed.
 */

/**
 * C0 and C1 controls, DEL; soft hyphen; Arabic letter mark, Mongolian vowel separator, zero-width and directional
 * marks, line and paragraph separators, embeddings, overrides, isolates, invisible operators; byte-order mark,
 * interlinear annotations; tag characters; lone surrogates.
 */
const UNSAFE =
  /[\u0000-\u001f\u007f-\u009f\u00ad\u061c\u180e\u200b-\u200f\u2028-\u202e\u2060-\u206f\ufeff\ufff9-\ufffb]|[\u{e0000}-\u{e007f}]|\p{Surrogate}/gu;

function escaped(sign: string): string {
  const code = sign.codePointAt(0) ?? 0;
  if (code < 0x100) return "\\x" + code.toString(16).padStart(2, "0");
  return code > 0xffff ? `\\u{${code.toString(16)}}` : "\\u" + code.toString(16).padStart(4, "0");
}

/** One line of harmless text; newlines and tabs are escaped too. */
export function safeText(text: string): string {
  return text.replace(UNSAFE, escaped);
}

/** Harmless text of several lines: LF stays, CR LF becomes LF, everything else as `safeText`. */
export function safeLines(text: string): string {
  return text
    .split(/\r?\n/)
    .map((line) => safeText(line))
    .join("\n");
}
