import { describe, expect, test } from "vitest";
import { FrameWriter } from "../../../cli/screens/writer.ts";
import { SeenTerminal } from "../../support/headless.ts";

function stage(columns: number, rows: number) {
  const seen = new SeenTerminal(columns, rows);
  const sent: string[] = [];
  let settled = Promise.resolve();
  const out = {
    columns,
    rows,
    write(text: string) {
      sent.push(text);
      settled = settled.then(() => seen.write(text));
      return true;
    },
  };
  return { seen, sent, out, writer: new FrameWriter(out), settle: () => settled };
}

const frameOf = (columns: number, rows: number, tag: string) =>
  Array.from({ length: rows }, (_, row) => `${tag} row ${row} `.padEnd(columns, "x").slice(0, columns)).join("\n");

describe.each([
  [80, 24],
  [120, 40],
])("the frame writer at %i by %i", (columns, rows) => {
  test("shows a full frame exactly, last column and last row included, without scrolling", async () => {
    const { seen, writer, settle } = stage(columns, rows);
    writer.write(frameOf(columns, rows, "a"));
    await settle();
    expect(seen.lines()).toEqual(frameOf(columns, rows, "a").split("\n"));
    expect(seen.terminal.buffer.active.baseY).toBe(0);
  });

  test("sends only the line that changed, and nothing when none did", async () => {
    const { seen, sent, writer, settle } = stage(columns, rows);
    const lines = frameOf(columns, rows, "a").split("\n");
    writer.write(lines.join("\n"));
    sent.length = 0;
    writer.write(lines.join("\n"));
    expect(sent).toEqual([]);
    lines[5] = "only this";
    writer.write(lines.join("\n"));
    await settle();
    expect(sent).toHaveLength(1);
    expect(sent[0]).toContain("\u001b[6;1H");
    expect(sent[0].length).toBeLessThan(60);
    expect(sent[0]).not.toMatch(/\u001b\[[23]J/);
    expect(seen.lines()).toEqual(lines);
  });

  test("clears lines that a shorter frame no longer has", async () => {
    const { seen, writer, settle } = stage(columns, rows);
    writer.write(frameOf(columns, rows, "a"));
    writer.write("one\ntwo");
    await settle();
    expect(seen.lines().filter((line) => line !== "")).toEqual(["one", "two"]);
  });

  test("draws everything again after a resize, in the new size", async () => {
    const { seen, out, writer, settle } = stage(columns, rows);
    writer.write(frameOf(columns, rows, "a"));
    await settle();
    out.columns = columns - 20;
    out.rows = rows - 4;
    seen.terminal.resize(columns - 20, rows - 4);
    let told = 0;
    writer.on("resize", () => told++);
    writer.resized();
    writer.write(frameOf(columns - 20, rows - 4, "b"));
    await settle();
    expect(told).toBe(1);
    expect(seen.lines()).toEqual(frameOf(columns - 20, rows - 4, "b").split("\n"));
  });
});

describe("the frame writer", () => {
  test("repaints over whatever something else wrote on the screen", async () => {
    const { seen, writer, settle } = stage(80, 24);
    writer.write("one\ntwo");
    await settle();
    await seen.write("\u001b[10;10Hgarbage");
    writer.repaint();
    await settle();
    expect(seen.lines().filter((line) => line !== "")).toEqual(["one", "two"]);
  });

  test("takes cursor commands and blank writes of the layout library for no frame", () => {
    const { sent, writer } = stage(80, 24);
    for (const noise of ["", "\n", "\u001b[?25l", "\u001b[?25h\u001b[?2026l"]) writer.write(noise);
    expect(sent).toEqual([]);
  });

  test("writes each paint inside one synchronised update", () => {
    const { sent, writer } = stage(80, 24);
    writer.write("one");
    expect(sent[0].startsWith("\u001b[?2026h")).toBe(true);
    expect(sent[0].endsWith("\u001b[?2026l")).toBe(true);
  });

  test("erases the rest of a short line, but never after a full one, whose last character some terminals would lose", () => {
    const { sent, writer } = stage(20, 2);
    writer.write(`${"x".repeat(20)}\nshort`);
    expect(sent[0]).toContain(`${"x".repeat(20)}\u001b[0m\u001b[2;1Hshort\u001b[0m\u001b[K`);
  });

  test("writes nothing once it is shut", () => {
    const { sent, writer } = stage(80, 24);
    writer.shut();
    writer.write("one");
    expect(sent).toEqual([]);
  });

  test("keeps a coloured line's colour from running into the next", async () => {
    const { seen, writer, settle } = stage(80, 24);
    writer.write("\u001b[7mdark\ntwo");
    await settle();
    expect(seen.terminal.buffer.active.getLine(0)?.getCell(0)?.isInverse()).not.toBe(0);
    expect(seen.terminal.buffer.active.getLine(1)?.getCell(0)?.isInverse()).toBe(0);
  });
});
