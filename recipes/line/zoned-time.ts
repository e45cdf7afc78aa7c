/**
 * Times as people say them, in the line's time zone. A local time that does not exist or exists twice (when clocks
 * change) is refused with both candidates: order in the record must not rest on a guess.
 *
 * Written over Intl rather than with a date library: this is all that is needed of one, and loading temporal-polyfill
 * took 30 ms where a whole verb should start in ten (measured once, Node 20, two cores).
 */
import { refuse } from "../../engine/index.ts";

const formats = new Map<string, Intl.DateTimeFormat>();

function formatOf(timeZone: string): Intl.DateTimeFormat {
  let format = formats.get(timeZone);
  if (!format) {
    format = new Intl.DateTimeFormat("en-GB", {
      timeZone,
      calendar: "gregory",
      numberingSystem: "latn",
      year: "numeric",
      month: "2-digit",
      day: "2-digit",
      hour: "2-digit",
      minute: "2-digit",
      second: "2-digit",
      hourCycle: "h23",
    });
    formats.set(timeZone, format);
  }
  return format;
}

interface LocalTime {
  year: number;
  month: number;
  day: number;
  hour: number;
  minute: number;
  second: number;
}

/** Wall-clock time of an instant (ms since 1970) in a zone, to the second. */
function localTime(ms: number, timeZone: string): LocalTime {
  const parts = Object.fromEntries(
    formatOf(timeZone)
      .formatToParts(ms)
      .map(({ type, value }) => [type, Number(value)]),
  );
  const { year, month, day, hour, minute, second } = parts;
  return { year, month, day, hour, minute, second };
}

/** The wall-clock time read as if it were UTC, ms. Years below 100 cannot occur: the grammar asks for four digits. */
function asIfUtc({ year, month, day, hour, minute, second }: LocalTime): number {
  return Date.UTC(year, month - 1, day, hour, minute, second);
}

/** Difference between wall clock and UTC at an instant, ms. */
function offsetAt(ms: number, timeZone: string): number {
  return asIfUtc(localTime(ms, timeZone)) - Math.floor(ms / 1000) * 1000;
}

const DAY = 86_400_000;

/** Offsets a zone uses around a wall-clock time: offsets change at most once in two days. */
function offsetsAround(wall: number, timeZone: string): number[] {
  return [...new Set([offsetAt(wall - DAY, timeZone), offsetAt(wall + DAY, timeZone)])];
}

/** Instants at which the zone's clocks show this wall-clock time: none, one or two, earliest first. */
function instantsOf(local: LocalTime, timeZone: string): number[] {
  const wall = asIfUtc(local);
  return offsetsAround(wall, timeZone)
    .map((offset) => wall - offset)
    .filter((ms) => asIfUtc(localTime(ms, timeZone)) === wall)
    .sort((a, b) => a - b);
}

/** "2026-03-29 14:05" in the zone. Seconds are dropped, not rounded. */
export function formatWhen(ms: number, timeZone: string): string {
  const { year, month, day, hour, minute } = localTime(ms, timeZone);
  const two = (value: number) => String(value).padStart(2, "0");
  return `${String(year).padStart(4, "0")}-${two(month)}-${two(day)} ${two(hour)}:${two(minute)}`;
}

/** "2026-03-29T14:05:00+01:00": the instant with the zone's offset, to the second; read back by `parseWhen`. */
export function formatExactly(ms: number, timeZone: string): string {
  const { second } = localTime(ms, timeZone);
  const offset = offsetAt(ms, timeZone) / 60_000;
  const two = (value: number) => String(Math.floor(value)).padStart(2, "0");
  const sign = offset < 0 ? "-" : "+";
  const zone = `${sign}${two(Math.abs(offset) / 60)}:${two(Math.abs(offset) % 60)}`;
  return `${formatWhen(ms, timeZone).replace(" ", "T")}:${two(second)}${zone}`;
}

const DATE_AND_TIME =
  /^(\d{4})-(\d{2})-(\d{2})[T ](\d{2}):(\d{2})(?::(\d{2})(?:\.(\d{1,9}))?)?\s*(Z|[+-]\d{2}:?\d{2})?$/i;
const TIME_ALONE = /^(\d{1,2}):(\d{2})(?::(\d{2}))?$/;
const HINT = "write 23:40, 2026-03-29T14:05, or with an offset, 2026-03-29T14:05+01:00";

/**
 * Reads a time and returns ms since 1970:
 * - ISO 8601 with offset or Z: that instant;
 * - ISO 8601 without offset: wall-clock time in the line's zone;
 * - "23:40": today in the line's zone, or yesterday when that would lie in the future (a night shift entering its runs
 *   after midnight; nothing is recorded ahead of time).
 *
 * Throws `not-a-time` (also for 31 February), `ambiguous-time` and `missing-time` for local times at a change of clocks,
 * each with both candidates in the hint.
 */
export function parseWhen(text: string, { timeZone, nowMs }: { timeZone: string; nowMs: number }): number {
  const trimmed = text.trim();
  const full = DATE_AND_TIME.exec(trimmed);
  if (full) {
    const [year, month, day, hour, minute, second] = full.slice(1, 7).map((part) => Number(part ?? 0));
    const local = { year, month, day, hour, minute, second };
    refuseImpossible(local, trimmed);
    const fraction = full[7] === undefined ? 0 : Math.floor(Number(`0.${full[7]}`) * 1000);
    return (
      (full[8] ? asIfUtc(local) - offsetWritten(full[8], trimmed) : theInstant(local, timeZone, trimmed)) + fraction
    );
  }
  const clock = TIME_ALONE.exec(trimmed);
  if (!clock) refuse("not-a-time", `"${trimmed.slice(0, 60)}" is not a time`, { hint: HINT });
  const [hour, minute, second] = clock.slice(1, 4).map((part) => Number(part ?? 0));
  const today = { ...localTime(nowMs, timeZone), hour, minute, second };
  refuseImpossible(today, trimmed);
  const candidates = instantsOf(today, timeZone);
  // at a change of clocks the first of two instants may be past and the second ahead: only one of them can be meant
  const past = candidates.filter((ms) => ms <= nowMs);
  if (past.length === 1) return past[0];
  if (past.length > 1 || candidates.length === 0) return theInstant(today, timeZone, trimmed);
  const before = new Date(Date.UTC(today.year, today.month - 1, today.day - 1));
  const [year, month, day] = [before.getUTCFullYear(), before.getUTCMonth() + 1, before.getUTCDate()];
  return theInstant({ ...today, year, month, day }, timeZone, trimmed);
}

function refuseImpossible(local: LocalTime, text: string): void {
  const { year, month, day, hour, minute, second } = local;
  const there = new Date(asIfUtc(local));
  const exists =
    year >= 1970 && month <= 12 && there.getUTCMonth() + 1 === month && there.getUTCDate() === day && hour < 24;
  if (!exists || minute > 59 || second > 59) {
    refuse("not-a-time", `"${text}" does not exist in the calendar, or lies before 1970`, { hint: HINT });
  }
}

function offsetWritten(offset: string, text: string): number {
  if (/z/i.test(offset)) return 0;
  const [hours, minutes] = [Number(offset.slice(1, 3)), Number(offset.slice(-2))];
  if (hours > 14 || minutes > 59) refuse("not-a-time", `"${text}" has an offset that no clock uses`, { hint: HINT });
  return (offset[0] === "-" ? -1 : 1) * (hours * 60 + minutes) * 60_000;
}

/** The one instant of a wall-clock time. Throws `ambiguous-time`, `missing-time` with both candidates. */
function theInstant(local: LocalTime, timeZone: string, text: string): number {
  const instants = instantsOf(local, timeZone);
  if (instants.length === 1) return instants[0];
  if (instants.length === 2) {
    const [first, second] = instants.map((ms) => formatExactly(ms, timeZone));
    const message = `"${text}" came twice in ${timeZone}, when clocks went back`;
    refuse("ambiguous-time", message, { hint: `write ${first} or ${second}` });
  }
  const wall = asIfUtc(local);
  const near = offsetsAround(wall, timeZone)
    .map((offset) => wall - offset)
    .sort((a, b) => a - b)
    .map((ms) => formatExactly(ms, timeZone));
  const message = `"${text}" did not exist in ${timeZone}, when clocks went forward`;
  return refuse("missing-time", message, { hint: `write ${near.join(" or ")}` });
}
