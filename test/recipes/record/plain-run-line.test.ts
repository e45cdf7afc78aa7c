import { createHash } from "node:crypto";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { EntryData } from "../../../recipes/record/entries.ts";
import { encodeEntry, NO_HASH, readLine } from "../../../recipes/record/format.ts";
import { plainRunLine } from "../../../recipes/record/plain-run.ts";

const data: EntryData["run"] = {
  chamber: "A2",
  recipe: "blue",
  settings_from: "given",
  steps: [{ settings: { silane: { value: 812, unit: "sccm" }, time: { value: 560.5, unit: "s" } } }],
  count: 1,
  since_clean: 0,
  kind: "tuning",
  boat: "7",
  position: "left, é",
  note: "as found",
  imported_from: { file: "h.csv", row: 3 },
  readings: [
    { gauge: "ellipsometer", on: "polished", index: 2.05, thickness_nm: 84.1 },
    { gauge: "reflectometer", on: "cell", reflectance_minimum_nm: 601.2, weighted_reflectance_percent: 2.1 },
  ],
};
const place = { seq: 7, prev: "ab".repeat(32) };
const stamp = { ...place, entered: "2026-03-01T22:40:00.000Z", by: "kim" };
const { line, entry } = encodeEntry({ kind: "run", data }, stamp);
const bare = line.subarray(0, -1);
const quick = (bytes: Buffer, at = place) => plainRunLine(bytes, 0, bytes.length, at);

/** The line with its text changed and its own hash made right again: what a careful forger or another writer could leave. */
function rehashed(text: string): Buffer {
  const body = Buffer.from(text, "utf8");
  const hash = createHash("sha256").update(body).digest("hex");
  return Buffer.concat([body, Buffer.from(`,"hash":"${hash}"}`)]);
}
const body = bare.toString("utf8").slice(0, -75);

describe("the quick yes for a line that holds an ordinary run", () => {
  it("gives the entry that was written, with every optional member", () => {
    expect(quick(bare)).toEqual(entry);
    expect(quick(bare)).toEqual(readLine(bare).ok ? entry : null);
  });

  it("says perhaps when the line is not the next one", () => {
    expect(quick(bare, { ...place, seq: 8 })).toBeNull();
    expect(quick(bare, { ...place, prev: NO_HASH })).toBeNull();
  });

  it("says perhaps to a line of which a single bit is another", () => {
    for (let at = 0; at < bare.length; at += 7) {
      const bent = Buffer.from(bare);
      bent[at] ^= 1 << (at % 8);
      expect(quick(bent), `byte ${at}`).toBeNull();
    }
  });

  it("never says yes where readLine says no, whatever was put into the text and hashed anew", () => {
    const piece = fc.oneof(
      fc.constantFrom('"', "\\", "{", "}", "[", "]", ",", ":", "0", "-", "1e9", "\u0000", "\ufffd", "é", " ", "null"),
      fc.constantFrom('"__proto__":{"unit":"s","value":1},', '"constructor":', ',"x":1', '"count":0', "2026-02-30T"),
      fc.string({ maxLength: 5 }),
    );
    let yes = 0;
    fc.assert(
      fc.property(fc.nat(body.length), fc.nat(6), piece, (at, cut, put) => {
        const bytes = rehashed(body.slice(0, at) + put + body.slice(Math.min(body.length, at + cut)));
        const found = quick(bytes);
        if (!found) return;
        yes++;
        const judged = readLine(bytes);
        expect(judged.ok, bytes.toString("utf8")).toBe(true);
        if (judged.ok) expect(found).toEqual(judged.entry);
      }),
      { numRuns: 6000 },
    );
    // Else the property has been looking at nothing.
    expect(yes).toBeGreaterThan(100);
  });

  it("leaves numbers and times that the schema refuses to the schema", () => {
    for (const [good, bad] of [
      ['"index":2.05', '"index":101'],
      ['"count":1', '"count":0'],
      ['"count":1', '"count":1.5'],
      ['"at":"2026-03-01T22', '"at":"2026-13-01T22'],
      ['"value":812', '"value":0812'],
      ['"seq":7', '"seq":07'],
      ['"on":"cell"', '"on":"floor"'],
    ] as const) {
      expect(body, good).toContain(good);
      expect(quick(rehashed(body.replace(good, bad))), bad).toBeNull();
    }
  });

  it("hashes bytes that are not UTF-8 as they stand", () => {
    const bytes = Buffer.from(bare);
    bytes[bytes.indexOf("é")] = 0xff;
    expect(quick(bytes)).toBeNull();
  });
});
