import { describe, expect, test } from "vitest";
import { commandFor, commands, commandsOf, footerCommands, type Place } from "../../../cli/keys.ts";
import { helpLines } from "../../../cli/screens/help.ts";

const places = [...new Set(commands.flatMap((command) => command.places))];

describe("the key table", () => {
  test.each(places)("gives no key two meanings on %s", (place: Place) => {
    const keys = commandsOf(place).flatMap((command) => command.keys);
    // q leaves the line screen but goes back elsewhere: the one key that both commands of a screen may name
    const shared = keys.filter((key, i) => keys.indexOf(key) !== i);
    expect(shared.filter((key) => !(place === "chamber" && key === "q"))).toEqual([]);
  });

  test("q goes back from a chamber and leaves only from the line", () => {
    expect(commandFor("chamber", "q")?.id).toBe("back");
    expect(commandFor("line", "q")?.id).toBe("leave");
    expect(commandFor("chamber", "Q")?.id).toBe("leave");
  });

  test("every command has a label and a sentence of help", () => {
    for (const command of commands) {
      expect(command.label.length).toBeGreaterThan(1);
      expect(command.help).toMatch(/^[A-Z].*\.$/);
      expect(command.keys.length).toBeGreaterThan(0);
    }
  });

  test("every place shows a way out in its footer or leaves with q", () => {
    for (const place of places) {
      const ids = footerCommands(place).map((command) => command.id);
      expect(ids.some((id) => id === "back" || id === "leave" || id === "no")).toBe(true);
    }
  });

  test("no motion is on a letter alone", () => {
    for (const command of commands.filter((one) =>
      ["up", "down", "first", "last", "page-up", "page-down"].includes(one.id),
    )) {
      expect(command.keys.some((key) => key.length > 1)).toBe(true);
    }
  });

  test.each(places)("the help of %s names every command once", (place: Place) => {
    const lines = helpLines(place);
    for (const command of commandsOf(place))
      expect(lines.filter((line) => line.endsWith(command.help))).toHaveLength(1);
  });
});
