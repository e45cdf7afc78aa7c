/**
 * Everything the screens remember, as data. What changes it is in `reduce.ts`; what is drawn from it, in the panes.
 */
import type { ChamberView, LineOverview, OpenChange, Outlook, ProposalView } from "../../recipes/index.ts";
import type { Place } from "../keys.ts";
import type { RunTyped } from "./desk.ts";
import type { Input } from "./keyboard.ts";
import type { RunForm } from "./run-form.ts";
import type { TextField } from "./text-field.ts";

export type Picture = "plane" | "spectrum" | "runs" | "learned";
export const pictures: readonly Picture[] = ["plane", "spectrum", "runs", "learned"];

/** The chamber being looked at. */
export interface ChamberState {
  view: ChamberView;
  /** Settings tried, all of them; equal to those in force when nothing is tried. */
  draft: ReadonlyMap<string, number>;
  /** What to expect at the draft; null while it equals what is in force, or is not answered yet. */
  after: Outlook | null;
  /** Drafts before, newest last. */
  past: readonly ReadonlyMap<string, number>[];
  /** The setting chosen, in the view's order. */
  cursor: number;
  /** A value being typed for it. */
  typing: TextField | null;
  picture: Picture;
}

/** Something to be done outside: asked for by the reducer, carried out by `perform.ts`. */
export type Effect =
  | { do: "load" }
  | { do: "reread" }
  | { do: "open"; chamber: string }
  | { do: "peek"; chamber: string }
  | { do: "look"; chamber: string; settings: ReadonlyMap<string, number> }
  | { do: "propose"; chamber: string }
  | { do: "adopt"; chamber: string; proposal: string; reason: string }
  | { do: "enter"; chamber: string; change: string; readBack?: ReadonlyMap<string, number> }
  | { do: "log"; chamber: string; run: RunTyped }
  | { do: "clean"; chamber: string }
  | { do: "close"; chamber: string; change: string }
  | { do: "undo"; chamber: string; change: string; reason: string }
  | { do: "leave" }
  | { do: "repaint" }
  | { do: "suspend" };

/** What lies over a screen and takes the keys. The last one is on top. */
export type Layer =
  | { kind: "proposal"; chamber: string; proposal: ProposalView; scroll: number }
  | { kind: "reason"; title: string; about: readonly string[]; field: TextField; onYes: ReasonFor }
  | { kind: "name"; question: string; expected: string; field: TextField; onYes: Effect }
  | { kind: "confirm"; question: string; onYes: Effect }
  | { kind: "entering"; chamber: string; change: OpenChange; readBack: ReadonlyMap<string, number> }
  | {
      kind: "read-back";
      chamber: string;
      change: OpenChange;
      readBack: ReadonlyMap<string, number>;
      at: number;
      field: TextField;
    }
  | { kind: "form"; chamber: string; form: RunForm }
  | { kind: "reading"; title: string; lines: readonly string[]; scroll: number; sheet?: true }
  | { kind: "commands"; field: TextField; cursor: number };

export type ReasonFor =
  | { do: "adopt"; chamber: string; proposal: string; nameFirst: boolean }
  | { do: "undo"; chamber: string; change: string };

export interface Message {
  tone: "good" | "plain" | "watch";
  text: string;
}

export interface State {
  columns: number;
  rows: number;
  overview: LineOverview | null;
  screen: "line" | "chamber";
  /** Name of the chamber chosen on the line screen. */
  chosen: string | null;
  filter: TextField | null;
  filtering: boolean;
  chamber: ChamberState | null;
  layers: readonly Layer[];
  message: Message | null;
  /** What was said since the start, oldest first. */
  log: readonly Message[];
  /** What is being waited for, in words; nothing that writes starts meanwhile. */
  busy: string | null;
}

export type Event =
  | Input
  | { kind: "size"; columns: number; rows: number }
  | { kind: "overview"; overview: LineOverview }
  | { kind: "chamber"; view: ChamberView; open: boolean }
  | { kind: "looked"; chamber: string; settings: ReadonlyMap<string, number>; outlook: Outlook }
  | { kind: "proposed"; chamber: string; proposal: ProposalView }
  | { kind: "adopted"; chamber: string; change: string; sheet: readonly string[] }
  | { kind: "done"; text: string }
  | { kind: "closed"; change: string; lines: readonly string[] }
  | { kind: "failed"; text: string };

/** A state and what it asks to have done. */
export interface Step {
  state: State;
  effects: readonly Effect[];
}

export function startState(columns: number, rows: number): State {
  return {
    columns,
    rows,
    overview: null,
    screen: "line",
    chosen: null,
    filter: null,
    filtering: false,
    chamber: null,
    layers: [],
    message: null,
    log: [],
    busy: null,
  };
}

/** The smallest window the screens are drawn in; below it they only say so, and take no key but those that leave. */
export const smallest = { columns: 60, rows: 18 };

export function tooSmall(state: Pick<State, "columns" | "rows">): boolean {
  return state.columns < smallest.columns || state.rows < smallest.rows;
}

/** Where the next key goes. */
export function placeOf(state: State): Place {
  const top = state.layers.at(-1);
  if (top !== undefined) return top.kind === "reading" && top.sheet ? "sheet" : top.kind;
  if (state.screen === "line") return state.filtering ? "filter" : "line";
  return state.chamber !== null && state.chamber.typing !== null ? "value" : "chamber";
}

/** Chambers shown on the line screen, in the order of the overview. */
export function chambersShown(state: State): LineOverview["chambers"] {
  const all = state.overview?.chambers ?? [];
  const wanted = state.filter?.text.trim().toLowerCase() ?? "";
  if (wanted === "") return all;
  return all.filter((row) =>
    `${row.chamber} ${row.recipe} ${row.attention} ${row.sentence}`.toLowerCase().includes(wanted),
  );
}

/** The chamber that commands act on: the one open, else the one chosen. */
export function chamberInHand(state: State): string | null {
  return state.screen === "chamber" ? (state.chamber?.view.chamber ?? null) : state.chosen;
}

/** The open change of a chamber, from whichever screen knows the chamber. */
export function openChangeOf(state: State, chamber: string): OpenChange | null {
  if (state.screen === "chamber" && state.chamber?.view.chamber === chamber) return state.chamber.view.openChange;
  return state.overview?.chambers.find((row) => row.chamber === chamber)?.openChange ?? null;
}

export type Room = "small" | "medium" | "large";

/** How much fits: one picture at a time, two, or everything at once. */
export function roomOf(columns: number, rows: number): Room {
  if (columns < 110 || rows < 34) return "small";
  return columns < 180 || rows < 44 ? "medium" : "large";
}
