import { describe, expect, test } from "vitest";
import { RowSlots } from "../../../cli/screens/row-slots.ts";

describe("stand-ins for rows", () => {
  test("give their rows back in the order they stand in, side by side and line by line", () => {
    const slots = new RowSlots();
    const [a, b, c] = ["left ", "right", "below"].map((row) => slots.hold(row));
    expect([a, b, c].every((sign) => sign.length === 1)).toBe(true);
    expect(slots.expand(`${a}    ${b}\n${c}`)).toBe("left right\nbelow");
  });

  test("are forgotten with the frame they were made for", () => {
    const slots = new RowSlots();
    const old = slots.hold("old");
    expect(slots.expand(old)).toBe("old");
    expect(slots.expand(old)).toBe("");
  });

  test("do not mistake a private-use character inside a row for a stand-in", () => {
    const slots = new RowSlots();
    const row = slots.hold("a\ue000b");
    expect(slots.expand(row)).toBe("a\ue000b");
  });

  test("keep colours of a row whole and drop only bare blanks at its end", () => {
    const slots = new RowSlots();
    expect(slots.expand(slots.hold("\u001b[7mx \u001b[0m   "))).toBe("\u001b[7mx \u001b[0m");
  });
});
