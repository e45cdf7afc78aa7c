/**
 * A line under study: sisters with a history, and one chamber that runs, is read, is cleaned, and whose book grows exactly
 * as the program would keep it (unmeasured depositions counted, unwritten cleans absent). The model may be asked at any
 * moment, and beside every measured run stands what truly happened, for the score.
 */
import {
  type ChamberEvent,
  type ChamberLog,
  type ChamberModel,
  LineModel,
  type Settings,
} from "../../calibration/index.ts";
import { type Random, random } from "../../engine/index.ts";
import type { Film } from "../../recipes/rehearsal/aim.ts";
import { type Engineer, engineer, scatteredAbout } from "./engineer.ts";
import type { StudyChamber, StudyReading, StudyWorld } from "./worlds-under-study.ts";

/** A measured run of the chamber under study beside the truth. */
export interface StudiedRun {
  /** Number of events in the book before this run: the model of that prefix is what was known then. */
  prefix: number;
  entry: number;
  settings: Settings;
  film: Film;
  reading: StudyReading;
  /** Measured runs since the last clean before this one, and whether that clean is in the book; null before any clean. */
  afterClean: { runs: number; written: boolean } | null;
}

/** In tuning, and just after a clean, every run is measured. */
const MEASURED_AT_FIRST = 8;
const SISTER_RUNS = 10;
const UNDER_STUDY = "under study";
const UNREAD: StudyReading = { index: null, thicknessNm: null, spoilt: false };

export class StudiedLine {
  readonly runs: StudiedRun[] = [];
  readonly events: ChamberEvent[] = [];
  readonly sisters: ChamberLog[];
  private readonly chamber: StudyChamber;
  private readonly hand: Engineer;
  private entry = 0;
  private deposited = 0;
  private afterClean: StudiedRun["afterClean"] = null;

  constructor(
    readonly world: StudyWorld,
    seed: string,
    options: {
      sisters?: number /** What the engineer sees in place of the reading. */;
      told?: StudiedLine["told"];
    } = {},
  ) {
    const moves = random(seed).fork("moves");
    const count = options.sisters ?? world.sisters;
    this.sisters = Array.from({ length: count }, (_, i) => this.sister(`sister ${i + 1}`, moves.fork(i)));
    this.chamber = world.chamber(UNDER_STUDY);
    this.hand = engineer(world, moves.fork("engineer"));
    this.told = options.told ?? ((_, reading) => reading);
  }

  private readonly told: (film: Film, reading: StudyReading) => { index: number | null; thicknessNm: number | null };

  /** A sister ran ten measured depositions about the reference recipe since her last clean. */
  private sister(name: string, moves: Random): ChamberLog {
    const chamber = this.world.chamber(name);
    const events = Array.from({ length: SISTER_RUNS }, () => {
      const settings = scatteredAbout(this.world.options.reference, moves);
      return this.runEvent(settings, chamber.run(settings).read());
    });
    return { chamber: name, events };
  }

  private runEvent(settings: Settings, reading: StudyReading): ChamberEvent {
    const { index, thicknessNm } = reading;
    const film = index === null && thicknessNm === null ? null : { index, thicknessNm, gauge: this.world.gauge };
    return { kind: "run", entry: this.entry++, settings, count: 1, sinceClean: null, film, light: [] };
  }

  /** Runs until so many more are in the book as measured, with a clean whenever the cycle is over. Returns the last. */
  run(measured = 1): StudiedRun {
    const until = this.runs.length + measured;
    while (this.runs.length < until) {
      if (this.chamber.sinceClean >= this.world.cycle) this.clean();
      this.deposit();
    }
    return this.runs[this.runs.length - 1];
  }

  private deposit(): void {
    const { sinceClean } = this.chamber;
    const read =
      this.deposited < MEASURED_AT_FIRST || this.freshlyCleaned() || sinceClean % this.world.measuredEvery === 0;
    const settings = this.hand.next(!read);
    const { film, read: readIt } = this.chamber.run(settings);
    this.deposited++;
    const reading = read ? readIt() : UNREAD;
    if (reading.index === null && reading.thicknessNm === null) {
      this.events.push(this.runEvent(settings, UNREAD));
      return;
    }
    const { afterClean } = this;
    const event = this.runEvent(settings, reading);
    this.runs.push({ prefix: this.events.length, entry: event.entry, settings, film, reading, afterClean });
    this.events.push(event);
    if (afterClean) this.afterClean = { ...afterClean, runs: afterClean.runs + 1 };
    this.hand.saw(this.told(film, reading));
  }

  /** The first two after a clean are always measured. An unwritten one is nothing to the people of the line. */
  private freshlyCleaned(): boolean {
    return this.afterClean?.written === true && this.afterClean.runs < 2;
  }

  /** A clean, in the book unless nobody wrote it down. */
  clean(): void {
    const { written } = this.chamber.clean();
    if (written) this.events.push({ kind: "clean", entry: this.entry++ });
    this.afterClean = { runs: 0, written };
  }

  leak(index: number): void {
    this.chamber.leak(index);
  }

  /** The model of the chamber under study as it was when its book held `prefix` events (all of them when left out). */
  model(prefix = this.events.length, replace: ReadonlyMap<number, ChamberEvent> = new Map()): ChamberModel {
    const events = this.events.slice(0, prefix).map((event) => replace.get(event.entry) ?? event);
    const logs = [...this.sisters, { chamber: UNDER_STUDY, events }];
    // A part of the book is asked as the program asks it; the whole one keeps every node that had a say on the way.
    const thorough = prefix === this.events.length;
    return new LineModel(logs, { ...this.world.options, thorough }).chamber(UNDER_STUDY);
  }
}
