/**
 * What the book can hold: the kinds of entry and the data of each. The bytes they are written as are `format.ts`'s
 * business; what they add up to is `ledger.ts`'s.
 *
 * Quantities in entries are {value, unit} as declared by the line at the time, so that an entry can be read without
 * the line file. Names of settings are the line's own.
 */

export interface Quantity {
  value: number;
  unit: string;
}

/** One layer of a recipe. `name` is left out when there is only one step. */
export interface StepSettings {
  name?: string;
  settings: Record<string, Quantity>;
}

export interface Reading {
  gauge: string;
  on: "polished" | "cell";
  index?: number;
  thickness_nm?: number;
  weighted_reflectance_percent?: number;
  reflectance_minimum_nm?: number;
  /** Sites averaged into index and thickness; 1 when only a mean was given. */
  sites?: number;
  site_values?: { position?: string; site?: string; index?: number; thickness_nm?: number }[];
  /** Name in spectra/ of a measured reflectance file. */
  spectrum?: string;
}

export interface EntryData {
  line: { line: string; created_by: string; line_file: string };
  "line file": { before: string; after: string; difference: string[]; loosened: string[] };
  run: {
    chamber: string;
    recipe: string;
    /** Where the settings came from: "given", "in force" (or both: "in force, with silane given"), "latest run". */
    settings_from: string;
    steps: StepSettings[];
    step?: string;
    count: number;
    since_clean?: number;
    kind?: "tuning" | "production";
    boat?: string;
    position?: string;
    readings: Reading[];
    note?: string;
    /** File and row, when imported. */
    imported_from?: { file: string; row: number };
  };
  reading: { run: number; reading: Reading; note?: string };
  recipe: { chamber: string; recipe: string; steps: StepSettings[]; reason?: string };
  clean: { chamber: string; what?: string };
  precoat: { chamber: string; count: number };
  service: { chamber: string; what: string };
  gauge: { gauge: string; reference: true; index?: number; thickness_nm?: number };
  note: { chamber?: string; text: string; override?: { alarm: string; runs: number; chamber: string } };
  /** The propose document as printed (contract), with goal, window and basis beside it. */
  proposal: {
    chamber: string;
    recipe: string;
    basis: string;
    document: Record<string, unknown>;
    goal: Record<string, unknown>;
    window: string[];
  };
  adopt: {
    proposal: number;
    chamber: string;
    recipe: string;
    reason: string;
    before: StepSettings[];
    after: StepSettings[];
    predicted: Record<string, unknown>;
    supersedes?: number;
  };
  approve: { change: number };
  enter: { change: number; read_back: StepSettings[] };
  close: {
    change: number;
    verdict: string;
    expected: Record<string, unknown>;
    got: Record<string, unknown>;
    runs: number[];
  };
  /** An undo opens a change of its own (like adopt) back to the settings from before, or cancels one never entered. */
  undo: {
    change: number;
    reason: string;
    chamber: string;
    recipe: string;
    cancelled: boolean;
    /** The change that was open in this chamber and recipe, other than the one undone, and ends with this entry. */
    supersedes?: number;
    before: StepSettings[];
    after: StepSettings[];
  };
  correct: { entry: number; fields: Record<string, unknown>; reason: string };
  /** Told once, by the first entry after a torn tail was set aside. */
  torn: { file: string; bytes: number };
  /** Opens a batch that is in the book as a whole or not at all: the next `entries` entries belong to it. */
  import: { file: string; entries: number; skipped: number };
}

export type Kind = keyof EntryData;

export interface Entry<K extends Kind = Kind> {
  /** Format version. */
  v: 1;
  /** 0, 1, 2, ... without gaps. */
  seq: number;
  /** When it happened, ISO 8601 with offset Z. */
  at: string;
  /** When it was entered. */
  entered: string;
  by: string;
  kind: K;
  data: EntryData[K];
  /** Hash of the entry before; 64 zeros for entry 0. */
  prev: string;
  hash: string;
}

export type AnyEntry = { [K in Kind]: Entry<K> }[Kind];

/** An entry still to be written: the book gives it number, time of entry, person and hashes. */
export interface Draft<K extends Kind = Kind> {
  kind: K;
  data: EntryData[K];
  /** When it happened, ISO 8601 with offset Z; the time of writing when left out. */
  at?: string;
  /** Who; the person at the keyboard when left out. */
  by?: string;
}

export type AnyDraft = { [K in Kind]: Draft<K> }[Kind];
