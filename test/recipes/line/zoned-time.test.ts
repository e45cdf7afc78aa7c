import fc from "fast-check";
import { Temporal } from "temporal-polyfill";
import { describe, expect, it } from "vitest";
import { formatExactly, formatWhen, parseWhen } from "../../../recipes/line/zoned-time.ts";
import { problemsOf } from "./given.ts";

const lisbon = { timeZone: "Europe/Lisbon", nowMs: Date.UTC(2026, 2, 29, 13, 5) };
const utc = (...parts: [number, number, number, number, number]) => Date.UTC(...parts);

describe("a time", () => {
  it("with an offset is that instant, without one the wall clock of the line's zone", () => {
    expect(parseWhen("2026-03-29T14:05+01:00", lisbon)).toBe(utc(2026, 2, 29, 13, 5));
    expect(parseWhen("2026-03-29T14:05", lisbon)).toBe(utc(2026, 2, 29, 13, 5));
    expect(parseWhen("2026-03-28 14:05", lisbon)).toBe(utc(2026, 2, 28, 14, 5));
    expect(parseWhen("2026-03-29T13:05:09.250Z", lisbon)).toBe(utc(2026, 2, 29, 13, 5) + 9250);
    expect(parseWhen("2026-03-29T05:35-0730", lisbon)).toBe(utc(2026, 2, 29, 13, 5));
  });

  it("of day is today, or yesterday when it would lie ahead", () => {
    expect(parseWhen("14:05", lisbon)).toBe(utc(2026, 2, 29, 13, 5));
    expect(parseWhen("14:06", lisbon)).toBe(utc(2026, 2, 28, 14, 6));
    expect(parseWhen("23:40", lisbon)).toBe(utc(2026, 2, 28, 23, 40));
    expect(parseWhen("0:10", lisbon)).toBe(utc(2026, 2, 29, 0, 10));
  });

  it("that clocks skipped or showed twice is refused with both candidates", () => {
    // Europe/Lisbon 2026: forward on 29 March 01:00 to 02:00, back on 25 October 02:00 to 01:00 (IANA tz database)
    expect(problemsOf(() => parseWhen("2026-03-29T01:30", lisbon))).toMatchObject([
      { code: "missing-time", hint: "write 2026-03-29T00:30:00+00:00 or 2026-03-29T02:30:00+01:00" },
    ]);
    expect(problemsOf(() => parseWhen("2026-10-25T01:30", lisbon))).toMatchObject([
      { code: "ambiguous-time", hint: "write 2026-10-25T01:30:00+01:00 or 2026-10-25T01:30:00+00:00" },
    ]);
    expect(problemsOf(() => parseWhen("01:30", lisbon))[0].code).toBe("missing-time");
    // between the two showings of 01:30 only the first is past
    const between = { ...lisbon, nowMs: utc(2026, 9, 25, 0, 45) };
    expect(parseWhen("01:30", between)).toBe(utc(2026, 9, 25, 0, 30));
    const after = { ...lisbon, nowMs: utc(2026, 9, 25, 12, 0) };
    expect(problemsOf(() => parseWhen("01:30", after))[0].code).toBe("ambiguous-time");
  });

  it.each([
    "",
    "now",
    "25:00",
    "12:60",
    "2026-02-31T10:00",
    "2026-13-01T10:00",
    "2026-03-29",
    "29.03.2026 14:05",
    "1969-12-31T10:00",
    "2026-03-29T14:05+25:00",
    "1e3",
  ])("%j is refused", (text) => {
    expect(problemsOf(() => parseWhen(text, lisbon))).toMatchObject([{ code: "not-a-time" }]);
  });

  it("is read as Temporal reads it, in every zone and around every change of clocks", () => {
    const zones = [
      "Europe/Lisbon",
      "America/New_York",
      "Asia/Kolkata",
      "Australia/Lord_Howe",
      "Pacific/Apia",
      "UTC",
      "Africa/Casablanca",
    ];
    const minutes = fc.integer({ min: utc(2009, 0, 1, 0, 0) / 60_000, max: utc(2035, 0, 1, 0, 0) / 60_000 });
    fc.assert(
      fc.property(minutes, fc.constantFrom(...zones), (minute, timeZone) => {
        const local = Temporal.Instant.fromEpochMilliseconds(minute * 60_000)
          .toZonedDateTimeISO("UTC")
          .toPlainDateTime();
        const candidates = (["earlier", "later"] as const).map((disambiguation) =>
          local.toZonedDateTime(timeZone, { disambiguation }),
        );
        const exact = candidates[0].epochMilliseconds === candidates[1].epochMilliseconds;
        const text = local.toString({ smallestUnit: "minute" });
        const problems = problemsOf(() => parseWhen(text, { timeZone, nowMs: 0 }));
        if (!exact) {
          expect(["ambiguous-time", "missing-time"]).toContain(problems[0]?.code);
          return;
        }
        expect(problems).toEqual([]);
        const ms = parseWhen(text, { timeZone, nowMs: 0 });
        expect(ms).toBe(candidates[0].epochMilliseconds);
        expect(formatWhen(ms, timeZone)).toBe(text.replace("T", " "));
        expect(parseWhen(formatExactly(ms, timeZone), lisbon)).toBe(ms);
      }),
      { numRuns: 400 },
    );
  });

  it("at every change of clocks of a year is judged as Temporal judges it", () => {
    for (const timeZone of ["Europe/Lisbon", "America/New_York", "Australia/Lord_Howe"]) {
      let at = Temporal.Instant.fromEpochMilliseconds(utc(2026, 0, 1, 0, 0)).toZonedDateTimeISO(timeZone);
      for (let i = 0; i < 2; i++) {
        at = at.getTimeZoneTransition("next")!;
        for (let minute = -90; minute <= 90; minute += 15) {
          const local = at.toPlainDateTime().add({ minutes: minute });
          const [earlier, later] = (["earlier", "later"] as const).map((disambiguation) =>
            local.toZonedDateTime(timeZone, { disambiguation }),
          );
          const problems = problemsOf(() =>
            parseWhen(local.toString({ smallestUnit: "minute" }), { timeZone, nowMs: 0 }),
          );
          const expected =
            earlier.epochMilliseconds === later.epochMilliseconds
              ? undefined
              : earlier.toPlainDateTime().equals(local)
                ? "ambiguous-time"
                : "missing-time";
          expect(problems[0]?.code).toBe(expected);
        }
      }
    }
  });
});
