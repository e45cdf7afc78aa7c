/**
 * The reducer: a state and an event in, a state and what should be done out. No terminal, no clock, no files, no React.
 * Keys are looked up in the key table by place; answers from outside arrive as events too.
 */
import { commandFor } from "../keys.ts";
import { adviceInWords } from "./advice-words.ts";
import { whyNot } from "./available.ts";
import { notHere } from "./elsewhere.ts";
import { giveCommand, sheetLayer } from "./give-command.ts";
import type { Input } from "./keyboard.ts";
import { reduceLayer } from "./reduce-layer.ts";
import { reduceValue } from "./reduce-value.ts";
import { say } from "./say.ts";
import { type ChamberState, chambersShown, type Event, placeOf, type State, type Step, tooSmall } from "./state.ts";
import { typed } from "./text-field.ts";
import { sameSettings } from "./what-if.ts";

export function reduce(state: State, event: Event): Step {
  switch (event.kind) {
    case "key":
    case "paste":
      return reduceInput(state, event);
    case "size":
      return still({ ...state, columns: event.columns, rows: event.rows });
    case "overview": {
      const names = event.overview.chambers.map((row) => row.chamber);
      const chosen = state.chosen !== null && names.includes(state.chosen) ? state.chosen : (names[0] ?? null);
      return still({ ...state, overview: event.overview, chosen });
    }
    case "chamber":
      return still(withChamber(state, event.view, event.open));
    case "looked": {
      const { chamber } = state;
      // An answer to a question that is no longer asked is dropped.
      if (chamber === null || chamber.view.chamber !== event.chamber || !sameSettings(chamber.draft, event.settings))
        return still(state);
      return still({ ...state, chamber: { ...chamber, after: event.outlook } });
    }
    case "proposed": {
      const layers = [
        ...state.layers,
        { kind: "proposal", chamber: event.chamber, proposal: event.proposal, scroll: 0 } as const,
      ];
      const view = state.chamber?.view;
      const known =
        view?.chamber === event.chamber ? withChamber(state, { ...view, proposal: event.proposal }, false) : state;
      const id = event.proposal.proposal;
      const text = `${event.chamber}: ${adviceInWords(event.proposal)}${id === null ? "" : `, kept as ${id}`}`;
      return still(say({ ...known, layers, busy: null }, "plain", text));
    }
    case "adopted": {
      const layers = [sheetLayer(event.change, event.chamber, event.sheet)];
      const text = `${event.change} is open; it counts once it is typed in at the tool: then e`;
      return still(say({ ...state, layers, busy: null }, "good", text));
    }
    case "done":
      return still(say({ ...state, busy: null, layers: withoutAsking(state.layers) }, "good", event.text));
    case "closed": {
      const back = `To take it back after all: coatwright undo ${event.change} --reason TEXT`;
      const lines = [...event.lines, "", back];
      const layers = [{ kind: "reading", title: `${event.change} is closed`, lines, scroll: 0 } as const];
      return still(say({ ...state, busy: null, layers }, "good", `${event.change} is closed: ${event.lines[0] ?? ""}`));
    }
    case "failed":
      // What was typed stays where it is, to be put right.
      return still(say({ ...state, busy: null }, "watch", event.text));
  }
}

const still = (state: State): Step => ({ state, effects: [] });

function withoutAsking(layers: State["layers"]): State["layers"] {
  return layers.filter((layer) => layer.kind === "reading");
}

/** A chamber freshly read: a what-if under way is kept as long as its settings still exist. */
function withChamber(state: State, read: ChamberState["view"], open: boolean): State {
  const known = state.chamber !== null && state.chamber.view.chamber === read.chamber ? state.chamber : null;
  const proposal = read.proposal ?? (known !== null && sameBasis(known.view, read) ? known.view.proposal : null);
  const view = { ...read, proposal };
  const offered = proposal !== null && (proposal.advice === "change" || proposal.advice === "out_of_reach");
  const wasNow =
    known === null || sameSettings(known.draft, known.view.now.settings) || view.proposal !== known.view.proposal;
  const draft =
    !wasNow && known !== null
      ? known.draft
      : offered && proposal !== null
        ? proposal.after.settings
        : view.now.settings;
  const after = sameSettings(draft, view.now.settings)
    ? null
    : offered && proposal !== null && sameSettings(draft, proposal.after.settings)
      ? proposal.after
      : (known?.after ?? null);
  const chamber: ChamberState = {
    view,
    draft,
    after,
    past: known?.past ?? [],
    cursor: Math.min(known?.cursor ?? 0, Math.max(0, view.settings.length - 1)),
    typing: known?.typing ?? null,
    picture: known?.picture ?? state.chamber?.picture ?? "plane",
  };
  return { ...state, chamber, chosen: view.chamber, screen: open ? "chamber" : state.screen, filtering: false };
}

/** Whether what a proposal rested on still stands: settings in force, runs, open change. */
function sameBasis(a: ChamberState["view"], b: ChamberState["view"]): boolean {
  return (
    a.recipe === b.recipe &&
    sameSettings(a.now.settings, b.now.settings) &&
    a.runs.length === b.runs.length &&
    a.runs.at(-1)?.entry === b.runs.at(-1)?.entry &&
    a.openChange?.change === b.openChange?.change &&
    a.openChange?.state === b.openChange?.state
  );
}

function reduceInput(state: State, input: Input): Step {
  const step = reduceOne(state, input);
  const several = input.kind === "paste" && input.more === true && step.state.message === null && step.state !== state;
  return several
    ? { ...step, state: say(step.state, "watch", "what was pasted had several lines: only the first was taken") }
    : step;
}

function reduceOne(state: State, input: Input): Step {
  const place = placeOf(state);
  const key = input.kind === "key" ? input.name : null;
  if (key === "ctrl-c") return { state, effects: [{ do: "leave" }] };
  // Nobody should press what they cannot see: only the way out works until there is room again.
  if (tooSmall(state)) return { state, effects: key === "Q" ? [{ do: "leave" }] : [] };
  if (key === "ctrl-l") return { state, effects: [{ do: "repaint" }] };
  if (key === "ctrl-z") return { state, effects: [{ do: "suspend" }] };
  const cleared = state.message === null ? state : { ...state, message: null };
  if (state.layers.length > 0) return reduceLayer(cleared, input);
  if (place === "filter") return reduceFilter(cleared, input);
  if (place === "value") return reduceValue(cleared, input);
  if (key === null) return still(say(cleared, "plain", "nothing to paste into here"));
  if (place === "chamber" && /^[0-9.]$/.test(key)) return reduceValue(cleared, input);
  const command = commandFor(place, key);
  if (command === null)
    return still(say(cleared, "plain", notHere(state, key) ?? "that key does nothing here; ? shows those that do"));
  const reason = whyNot(cleared, command.id);
  if (reason !== null) return still(say(cleared, "watch", reason));
  return giveCommand(cleared, command.id);
}

function reduceFilter(state: State, input: Input): Step {
  const key = input.kind === "key" ? input.name : null;
  const command = key === null ? null : commandFor("filter", key);
  if (command?.id === "back") return still({ ...state, filter: null, filtering: false });
  if (command?.id === "accept") return still({ ...state, filtering: false });
  const field = typed(state.filter ?? { text: "", at: 0 }, input);
  if (field === null) return still(state);
  const next = { ...state, filter: field };
  const shown = chambersShown(next);
  const chosen = shown.some((row) => row.chamber === state.chosen) ? state.chosen : (shown[0]?.chamber ?? null);
  return still({ ...next, chosen });
}
