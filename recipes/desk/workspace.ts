/**
 * A line folder at work: its line file, book, ledger and calibrated model, read when first needed and kept until the files
 * change. Everything the verbs and screens do goes through here; it decides nothing itself.
 */
import { type FilmReading, LineModel } from "../../calibration/index.ts";
import { type CoatedWafer, Refusal, refuse } from "../../engine/index.ts";
import { type CellLight, cellLight, filmOptics } from "../advice/cell-light.ts";
import { gaugeFor } from "../advice/expectation.ts";
import { type Chamber, type Goal, goalOf, type Line } from "../line/line.ts";
import { lineWafer } from "../line/line-wafer.ts";
import { readLine } from "../line/read-line.ts";
import type { Ports } from "../ports.ts";
import { Book } from "../record/book.ts";
import { catchUp, emptyLedger, type Ledger } from "../record/ledger.ts";
import type { RunRecord } from "../record/timeline.ts";
import { recipesOf } from "../record/versions.ts";
import { filmReading, type GaugeBiases } from "./film-readings.ts";
import { biasThen, gaugeBiases, latestMs } from "./gauge-readings.ts";
import { chamberLogs, learnOptions, referenceRecipe } from "./learn.ts";

export const LINE_FILE = "line.yaml";

/** Is this folder a line folder? */
export function holdsLine(folder: string, ports: Ports): boolean {
  return ports.files.exists(`${folder}/${LINE_FILE}`);
}

export class Workspace {
  private lineRead: { bytes: string; line: Line } | null = null;
  private bookOpened: Book | null = null;
  private ledgerBuilt: { ledger: Ledger; generation: number } | null = null;
  private modelBuilt: { key: string; model: LineModel | null } | null = null;
  private biasesBuilt: { key: string; biases: GaugeBiases } | null = null;
  private lightBuilt: { key: string; light: CellLight } | null = null;
  private waferBuilt: { key: string; wafer: CoatedWafer } | null = null;

  constructor(
    readonly folder: string,
    readonly ports: Ports,
    /** The demo line copied to a scratch folder. */
    readonly demo = false,
  ) {}

  /** The line as declared. Throws the Refusal of reading it; `no-line` when the folder has none. */
  get line(): Line {
    if (this.lineRead) return this.lineRead.line;
    const path = `${this.folder}/${LINE_FILE}`;
    if (!this.ports.files.exists(path))
      refuse("no-line", `no ${LINE_FILE} in ${this.folder}`, {
        hint: "coatwright new DIR makes one; --line DIR names another",
      });
    const bytes = this.ports.files.read(path);
    const line = readLine(bytes, LINE_FILE, { readFile: (name) => this.readBeside(name) });
    this.lineRead = { bytes: line.hash, line };
    return line;
  }

  /** A file named in line.yaml or a stack file, relative to the line folder. */
  readBeside(name: string): Uint8Array {
    return this.ports.files.read(name.startsWith("/") ? name : `${this.folder}/${name}`);
  }

  get book(): Book {
    this.bookOpened ??= Book.open(this.folder, this.ports);
    return this.bookOpened;
  }

  get ledger(): Ledger {
    const book = this.book;
    if (!this.ledgerBuilt || this.ledgerBuilt.generation !== book.generation)
      this.ledgerBuilt = { ledger: emptyLedger(), generation: book.generation };
    return catchUp(this.ledgerBuilt.ledger, book.entries);
  }

  /** Forgets the line file and catches up with what others wrote. */
  refresh(): void {
    this.lineRead = null;
    this.bookOpened?.refresh();
  }

  chamber(name: string): Chamber {
    const found = this.line.chambers.get(name);
    if (found) return found;
    const near = [...this.line.chambers.keys()].find((one) => one.toLowerCase() === name.toLowerCase());
    return refuse("unknown-chamber", `no chamber ${name} on ${this.line.name}`, {
      hint: near ? `did you mean ${near}?` : `chambers are ${[...this.line.chambers.keys()].join(", ")}`,
    });
  }

  /** The recipe meant: the one named, else the only one the chamber runs. Throws `which-recipe`, `no-recipe`. */
  recipe(chamber: string, named?: string): string {
    // What stands before the damage is not the chamber's story: better no answer than one from half a book.
    if (this.book.damage.length > 0) throw new Refusal(this.book.problems());
    if (named !== undefined) return named;
    const known = recipesOf(this.ledger, chamber);
    if (known.length === 1) return known[0];
    if (known.length === 0)
      return refuse("no-recipe", `no recipe was ever stated or run on ${chamber}`, {
        hint: `coatwright record recipe --chamber ${chamber} --recipe NAME --set silane=... says what is in force`,
      });
    return refuse("which-recipe", `${chamber} runs ${known.join(", ")}`, { hint: "name one with --recipe" });
  }

  goal(recipe: string): Goal {
    return goalOf(this.line, recipe);
  }

  /** Optics of the declared wafer. */
  get wafer(): CoatedWafer {
    const key = this.line.hash;
    if (this.waferBuilt?.key !== key) this.waferBuilt = { key, wafer: lineWafer(this.line) };
    return this.waferBuilt.wafer;
  }

  /** The calibrated line; null when the book holds neither a recipe nor a run to start from. */
  get model(): LineModel | null {
    const key = `${this.line.hash} ${this.ledger.basis}`;
    if (this.modelBuilt?.key !== key) this.modelBuilt = { key, model: this.learn(this.ledger) };
    return this.modelBuilt.model;
  }

  /** What each gauge reads too high, as its reference wafer shows it. */
  get gaugeBiases(): GaugeBiases {
    const key = `${this.line.hash} ${this.ledger.basis}`;
    if (this.biasesBuilt?.key !== key) this.biasesBuilt = { key, biases: gaugeBiases(this.line, this.ledger) };
    return this.biasesBuilt.biases;
  }

  /** The film of a run, all its readings together, freed of what its gauges read too high then. */
  filmOf(run: RunRecord): FilmReading | null {
    return filmReading(this.line, run.readings, biasThen(this.gaugeBiases, run.atMs));
  }

  /** Learns from a ledger: this one, or one as it was at an earlier time. */
  learn(ledger: Ledger): LineModel | null {
    const reference = referenceRecipe(this.line, ledger);
    if (!reference) return null;
    const { line } = this;
    const biases = gaugeBiases(line, ledger);
    // What is foreseen of a reading is what the film gauge will show, its own bias included; as of the last thing that
    // happened, so that the same book always gives the same answer.
    const then = biasThen(biases, latestMs(ledger));
    const bias = then?.biases.get(gaugeFor(line, "polished", "film")?.name ?? "")?.at(then.day) ?? null;
    return new LineModel(
      chamberLogs(line, ledger, biases),
      learnOptions(line, reference, filmOptics(this.wafer), bias),
    );
  }

  /** The light of the coated cell, with the facet factor as the book has pinned it. */
  get light(): CellLight {
    const key = `${this.line.hash} ${this.ledger.basis}`;
    if (this.lightBuilt?.key !== key) {
      const facet = this.model?.facet ?? { ...this.line.wafer.facetFactor, runs: 0, doubted: [] };
      this.lightBuilt = { key, light: cellLight(this.line, this.wafer, facet) };
    }
    return this.lightBuilt.light;
  }
}
