/**
 * What the terminal may be shown: colour or not, how many colours, box and braille signs or their ASCII twins.
 * The decision is ours alone (libraries guess from other variables), and meaning never rests on colour: every tone
 * accompanies a word or a sign.
 */

/** "none" means no escape at all; "mono" bold and inverse without colour, which only the screens use. */
export type ColourDepth = "none" | "mono" | "16" | "256" | "true";

/** How a surface may draw. */
export interface Look {
  colour: ColourDepth;
  ascii: boolean;
}

/** What a stretch of text is, not what colour it has. */
export type Tone = "plain" | "strong" | "quiet" | "good" | "watch" | "alarm" | "now" | "after" | "goal" | "chosen";

export interface LookQuestion {
  env: Readonly<Record<string, string | undefined>>;
  isTTY: boolean;
  /** `--no-color`, or `--color=always`. */
  flag?: "never" | "always";
  /** `--ascii`. */
  ascii?: boolean;
}

/**
 * Decides how a stream may be drawn on. A flag wins over the environment; `FORCE_COLOR` (other than 0) wins over
 * `NO_COLOR`, as the more specific wish; without either, colour goes to terminals that are not `TERM=dumb`.
 */
export function decideLook(question: LookQuestion): Look {
  return { colour: decideColour(question), ascii: question.ascii === true || !localeIsUtf8(question.env) };
}

function decideColour({ env, isTTY, flag }: LookQuestion): ColourDepth {
  if (flag === "never") return "none";
  const forced = env["FORCE_COLOR"];
  if (flag === "always" || (forced !== undefined && forced !== "")) {
    if (flag !== "always" && (forced === "0" || forced === "false")) return "none";
    const depth = depthOf(env);
    return depth === "none" ? "16" : depth;
  }
  const refused = env["NO_COLOR"];
  if (refused !== undefined && refused !== "") return "none";
  return isTTY ? depthOf(env) : "none";
}

function depthOf(env: LookQuestion["env"]): ColourDepth {
  const term = env["TERM"] ?? "";
  if (term === "dumb") return "none";
  const wide = env["COLORTERM"] ?? "";
  if (wide === "truecolor" || wide === "24bit") return "true";
  return term.includes("256") ? "256" : "16";
}

/** The first of LC_ALL, LC_CTYPE, LANG that is set decides, as the C library does. */
function localeIsUtf8(env: LookQuestion["env"]): boolean {
  const locale = env["LC_ALL"] || env["LC_CTYPE"] || env["LANG"] || "";
  return /utf-?8/i.test(locale);
}

/**
 * Select-graphic-rendition numbers of a tone: 16-colour names, so the terminal's own theme rules, in a blue (cyan) and
 * orange (yellow) family that stays apart for colour-blind eyes. `quiet` is for rules and shading, never for words that
 * matter. On a screen without colour, `strong`, `alarm` and `chosen` are still bold and inverse.
 */
const codes: Record<Tone, { colour: string; mono: string }> = {
  plain: { colour: "", mono: "" },
  strong: { colour: "1", mono: "1" },
  quiet: { colour: "2", mono: "" },
  good: { colour: "36", mono: "" },
  watch: { colour: "33", mono: "" },
  alarm: { colour: "1;33", mono: "1" },
  now: { colour: "36", mono: "" },
  after: { colour: "1;33", mono: "1" },
  goal: { colour: "1", mono: "1" },
  chosen: { colour: "7", mono: "7" },
};

/** The escape-wrapped text of one tone; the text itself with "none", or where the tone has nothing to add. */
export function paint(text: string, tone: Tone, look: Look): string {
  if (text === "" || look.colour === "none") return text;
  const code = look.colour === "mono" ? codes[tone].mono : codes[tone].colour;
  return code === "" ? text : `\u001b[${code}m${text}\u001b[0m`;
}

/** Text on a background of the given colour ("#1b2a6b"), as near as the terminal can; plain text below 256 colours. */
export function swatch(text: string, hex: string, look: Look): string {
  const channels = /^#([0-9a-f]{2})([0-9a-f]{2})([0-9a-f]{2})$/i.exec(hex);
  if (channels === null) return text;
  const [red, green, blue] = [channels[1]!, channels[2]!, channels[3]!].map((part) => Number.parseInt(part, 16));
  if (look.colour === "true") return `\u001b[48;2;${red};${green};${blue}m${text}\u001b[0m`;
  if (look.colour === "256") return `\u001b[48;5;${cubeIndex(red!, green!, blue!)}m${text}\u001b[0m`;
  return text;
}

/** Levels of the 6x6x6 cube of 256-colour terminals (xterm's, as its `256colres` table defines them). */
const cubeLevels = [0, 95, 135, 175, 215, 255];

function cubeIndex(red: number, green: number, blue: number): number {
  const nearest = (value: number) =>
    cubeLevels.reduce(
      (best, level, i) => (Math.abs(level - value) < Math.abs(cubeLevels[best]! - value) ? i : best),
      0,
    );
  return 16 + 36 * nearest(red) + 6 * nearest(green) + nearest(blue);
}

/** Signs with their ASCII twins; each is one cell wide in either form. */
export interface Signs {
  pointer: string;
  rule: string;
  wall: string;
  cut: string;
  now: string;
  after: string;
  low: string;
  high: string;
  leftOf: string;
  rightOf: string;
  tick: string;
  clean: string;
}

const boxSigns: Signs = {
  pointer: "▸",
  rule: "─",
  wall: "│",
  cut: "…",
  now: "●",
  after: "◆",
  low: "▾",
  high: "▴",
  leftOf: "◂",
  rightOf: "▸",
  tick: "┤",
  clean: "┊",
};

const asciiSigns: Signs = {
  pointer: ">",
  rule: "-",
  wall: "|",
  cut: "~",
  now: "O",
  after: "X",
  low: "v",
  high: "^",
  leftOf: "<",
  rightOf: ">",
  tick: "|",
  clean: ":",
};

export function signs(look: Look): Signs {
  return look.ascii ? asciiSigns : boxSigns;
}
