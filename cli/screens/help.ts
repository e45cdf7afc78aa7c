/**
 * The help page and the command list, both made from the key table.
 */
import { type Command, type CommandId, commandsOf, keyText, type Place } from "../keys.ts";
import { left } from "../text/width.ts";

/** One line a command of a place: keys, what it does, and where `whyNot` has a reason, why not now. */
export function helpLines(place: Place, whyNot: (id: CommandId) => string | null = () => null): string[] {
  const lines = commandsOf(place).map((command) => {
    const reason = whyNot(command.id);
    return `${left(keysOf(command), 18)} ${command.help}${reason === null ? "" : ` Not now: ${reason}.`}`;
  });
  if (place === "chamber") lines.push(`${left("0-9 .", 18)} Type a value for the chosen setting; enter takes it.`);
  lines.push(`${left("ctrl-c", 18)} Leave at once, from anywhere.`);
  return lines;
}

export function keysOf(command: Command): string {
  return command.keys.map(keyText).join(" ");
}

/** Commands of a place whose label or help contains the text, best first: labels that begin with it. */
export function matching(place: Place, text: string): Command[] {
  const wanted = text.trim().toLowerCase();
  const found = commandsOf(place).filter((command) =>
    `${command.label} ${command.help}`.toLowerCase().includes(wanted),
  );
  const rank = (command: Command) => (command.label.toLowerCase().startsWith(wanted) ? 0 : 1);
  return found.filter((command) => command.id !== "commands").sort((a, b) => rank(a) - rank(b));
}
