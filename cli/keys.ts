/**
 * The one table of keys: what can be pressed where, what it does, and what the footer, the help page and the command
 * list say about it. The reducer looks commands up here; nothing else knows a key by name.
 */

/** Where the next key goes. */
export type Place =
  | "line"
  | "chamber"
  | "value"
  | "proposal"
  | "reason"
  | "name"
  | "confirm"
  | "entering"
  | "read-back"
  | "form"
  | "reading"
  | "sheet"
  | "commands"
  | "filter";

export type CommandId =
  | "up"
  | "down"
  | "first"
  | "last"
  | "page-up"
  | "page-down"
  | "open"
  | "back"
  | "leave"
  | "help"
  | "commands"
  | "messages"
  | "repaint"
  | "suspend"
  | "reread"
  | "filter"
  | "less"
  | "more"
  | "much-less"
  | "much-more"
  | "step-back"
  | "reset"
  | "view"
  | "learned"
  | "next-chamber"
  | "previous-chamber"
  | "propose"
  | "adopt"
  | "sheet"
  | "enter-change"
  | "log-run"
  | "clean"
  | "close-change"
  | "undo-change"
  | "accept"
  | "yes"
  | "no"
  | "differs"
  | "next-field"
  | "previous-field";

export interface Command {
  id: CommandId;
  places: readonly Place[];
  /** Names as `keyboard.ts` gives them; the first is the one shown. */
  keys: readonly string[];
  /** One or two words for the footer. */
  label: string;
  /** One sentence for the help page. */
  help: string;
  /** Smaller comes first in the footer; without it the command is only in the help. */
  footer?: number;
}

const screens: readonly Place[] = ["line", "chamber"];
const scrolled: readonly Place[] = ["line", "chamber", "proposal", "reading", "sheet", "commands"];

export const commands: readonly Command[] = [
  {
    id: "open",
    places: ["line"],
    keys: ["enter", "right"],
    label: "open",
    help: "Open the chosen chamber.",
    footer: 1,
  },
  {
    id: "propose",
    places: ["line", "chamber"],
    keys: ["p"],
    label: "propose",
    help: "Ask for the next settings, or for the reason to leave them alone. The answer is kept in the book.",
    footer: 2,
  },
  {
    id: "adopt",
    places: ["chamber", "proposal"],
    keys: ["a"],
    label: "adopt",
    help: "Adopt the proposal, with a reason. It counts only once it is typed in at the tool.",
    footer: 3,
  },
  {
    id: "enter-change",
    places: ["line", "chamber", "sheet"],
    keys: ["e"],
    label: "entered",
    help: "Say that the adopted settings have been typed in at the tool.",
    footer: 4,
  },
  {
    id: "log-run",
    places: ["line", "chamber"],
    keys: ["l"],
    label: "log run",
    help: "Log a measured run: index, thickness, reflectance minimum.",
    footer: 5,
  },
  {
    id: "close-change",
    places: ["chamber"],
    keys: ["c"],
    label: "close",
    help: "Close the open change against the runs since: expected beside got.",
    footer: 6,
  },
  {
    id: "undo-change",
    places: ["chamber"],
    keys: ["u"],
    label: "undo",
    help: "Take the open change back: a new change to the settings from before, with a reason.",
    footer: 7,
  },
  {
    id: "clean",
    places: ["line", "chamber"],
    keys: ["x"],
    label: "clean",
    help: "Record that the chamber was cleaned now; a new cycle begins.",
  },
  {
    id: "sheet",
    places: ["chamber"],
    keys: ["s"],
    label: "sheet",
    help: "Show the settings to type in for the open change.",
    footer: 4,
  },
  {
    id: "view",
    places: ["chamber"],
    keys: ["v", "tab"],
    label: "view",
    help: "Next picture: film plane, reflectance, runs, what the model learned.",
    footer: 7,
  },
  {
    id: "learned",
    places: ["chamber"],
    keys: ["i"],
    label: "learned",
    help: "Read all that the model learned, what it cannot tell, and its alarms.",
  },
  {
    id: "less",
    places: ["chamber"],
    keys: ["left", "-"],
    label: "less",
    help: "Lower the chosen setting by its smallest step, as a what-if: nothing is written.",
  },
  {
    id: "more",
    places: ["chamber"],
    keys: ["right", "+", "="],
    label: "more",
    help: "Raise the chosen setting by its smallest step, as a what-if. Digits type a value instead.",
  },
  {
    id: "much-less",
    places: ["chamber"],
    keys: ["shift-left", "pgdn"],
    label: "10 less",
    help: "Lower the chosen setting by ten steps.",
  },
  {
    id: "much-more",
    places: ["chamber"],
    keys: ["shift-right", "pgup"],
    label: "10 more",
    help: "Raise the chosen setting by ten steps.",
  },
  {
    id: "reset",
    places: ["chamber"],
    keys: ["r"],
    label: "reset",
    help: "Drop the what-if: back to the settings in force.",
  },
  { id: "step-back", places: ["chamber"], keys: ["z"], label: "step back", help: "Take back the last what-if step." },
  { id: "next-chamber", places: ["chamber"], keys: ["]"], label: "next", help: "The next chamber of the line." },
  { id: "previous-chamber", places: ["chamber"], keys: ["["], label: "previous", help: "The chamber before." },
  {
    id: "filter",
    places: ["line"],
    keys: ["/"],
    label: "filter",
    help: "Show only chambers whose name, recipe or state contains what you type.",
    footer: 6,
  },
  { id: "reread", places: screens, keys: ["R"], label: "reread", help: "Read the line folder again." },
  { id: "up", places: scrolled, keys: ["up", "k"], label: "up", help: "One up." },
  { id: "down", places: scrolled, keys: ["down", "j"], label: "down", help: "One down." },
  {
    id: "first",
    places: ["line", "chamber", "proposal", "reading", "sheet"],
    keys: ["home", "g"],
    label: "first",
    help: "To the first.",
  },
  {
    id: "last",
    places: ["line", "chamber", "proposal", "reading", "sheet"],
    keys: ["end", "G"],
    label: "last",
    help: "To the last.",
  },
  {
    id: "page-up",
    places: ["line", "proposal", "reading", "sheet"],
    keys: ["pgup", "ctrl-u"],
    label: "page up",
    help: "One page up.",
  },
  {
    id: "page-down",
    places: ["line", "proposal", "reading", "sheet"],
    keys: ["pgdn", "ctrl-d", "space"],
    label: "page down",
    help: "One page down.",
  },
  {
    id: "accept",
    places: ["value", "reason", "name", "form", "read-back", "commands", "filter"],
    keys: ["enter"],
    label: "accept",
    help: "Take what is typed.",
    footer: 1,
  },
  {
    id: "next-field",
    places: ["form", "read-back"],
    keys: ["tab", "down"],
    label: "next",
    help: "To the next one.",
    footer: 2,
  },
  {
    id: "previous-field",
    places: ["form", "read-back"],
    keys: ["shift-tab", "up"],
    label: "before",
    help: "To the one before.",
  },
  { id: "yes", places: ["confirm", "entering"], keys: ["y"], label: "yes", help: "Yes, do it.", footer: 1 },
  {
    id: "differs",
    places: ["entering"],
    keys: ["d"],
    label: "one differs",
    help: "One value reads back differently: say which, and what it reads.",
    footer: 2,
  },
  {
    id: "no",
    places: ["confirm", "entering"],
    keys: ["n", "escape", "q"],
    label: "no",
    help: "No, leave everything as it is.",
    footer: 2,
  },
  {
    id: "back",
    places: ["chamber", "proposal", "reading", "sheet"],
    keys: ["q", "escape"],
    label: "back",
    help: "Back to where you came from.",
    footer: 8,
  },
  {
    id: "back",
    places: ["value", "reason", "name", "form", "read-back", "commands", "filter"],
    keys: ["escape"],
    label: "give up",
    help: "Give up what is being typed.",
    footer: 8,
  },
  {
    id: "help",
    places: ["line", "chamber", "proposal"],
    keys: ["?", "f1"],
    label: "help",
    help: "This page: every key that works here.",
    footer: 9,
  },
  { id: "commands", places: screens, keys: [":"], label: "commands", help: "Pick any command by its name." },
  { id: "messages", places: screens, keys: ["m"], label: "messages", help: "What was said and done since the start." },
  {
    id: "leave",
    places: screens,
    keys: ["Q", "q"],
    label: "leave",
    help: "Leave the program; nothing is lost.",
    footer: 10,
  },
  {
    id: "leave",
    places: [
      "proposal",
      "reading",
      "sheet",
      "value",
      "reason",
      "name",
      "confirm",
      "entering",
      "read-back",
      "form",
      "commands",
      "filter",
    ],
    keys: ["ctrl-c"],
    label: "leave",
    help: "Leave the program at once.",
  },
  {
    id: "repaint",
    places: [...screens, "proposal", "reading", "sheet"],
    keys: ["ctrl-l"],
    label: "repaint",
    help: "Draw the screen afresh.",
  },
  {
    id: "suspend",
    places: [...screens, "proposal", "reading", "sheet"],
    keys: ["ctrl-z"],
    label: "suspend",
    help: "Stop the program for now; `fg` brings it back.",
  },
];

const byPlace = new Map<string, Command>();
for (const command of commands)
  for (const place of command.places)
    for (const key of command.keys) if (!byPlace.has(`${place} ${key}`)) byPlace.set(`${place} ${key}`, command);

/** The command of a key at a place, or null. ctrl-c leaves from everywhere. */
export function commandFor(place: Place, key: string): Command | null {
  return byPlace.get(`${place} ${key}`) ?? null;
}

/** Commands of a place in footer order. */
export function footerCommands(place: Place): Command[] {
  return commands
    .filter((command) => command.footer !== undefined && command.places.includes(place))
    .sort((a, b) => (a.footer as number) - (b.footer as number));
}

/** Every command of a place, each once, in table order. */
export function commandsOf(place: Place): Command[] {
  return commands.filter((command) => command.places.includes(place));
}

const names: Readonly<Record<string, string>> = {
  up: "up",
  down: "down",
  left: "left",
  right: "right",
  escape: "esc",
  pgup: "PgUp",
  pgdn: "PgDn",
  "shift-tab": "shift-tab",
};

/** A key as the footer and the help write it. */
export function keyText(key: string): string {
  return names[key] ?? key;
}
