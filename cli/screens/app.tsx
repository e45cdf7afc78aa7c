/**
 * The root of what is drawn: picks the screen for the state and lays its panes out. Panes are rows of text made by pure
 * functions; the components only place them.
 */
import { Box, Transform } from "ink";
import { useSyncExternalStore } from "react";
import type { Look } from "../palette.ts";
import { fill, painted } from "../text/rows.ts";
import { compose, type Placed } from "./compose.ts";
import type { RowSlots } from "./row-slots.ts";
import type { Store } from "./store.ts";

export function App({ store, look, slots }: { store: Store; look: Look; slots: RowSlots }) {
  const state = useSyncExternalStore(store.subscribe, store.read);
  const bands = compose(state, look);
  return (
    <Box flexDirection="column" width={state.columns} height={state.rows}>
      {bands.map((band) => (
        <Box key={band.key} flexDirection="row" height={band.height}>
          {band.panes.map((pane) => (
            <Pane key={pane.key} pane={pane} height={band.height} look={look} slots={slots} />
          ))}
        </Box>
      ))}
    </Box>
  );
}

/**
 * A pane of fixed size. The layout library measures and remembers every different text it is given, without limit; so it
 * is given a blank of the pane's size, always the same, and the rows take its place when the frame is put together.
 */
function Pane({ pane, height, look, slots }: { pane: Placed; height: number; look: Look; slots: RowSlots }) {
  const rows = fill(pane.rows, { width: pane.width, height, look });
  return (
    <Box width={pane.width} height={height} flexShrink={0}>
      <Transform transform={(_blank: string, line: number) => slots.hold(painted(rows[line] ?? [], look))}>
        {blank(pane.width, height)}
      </Transform>
    </Box>
  );
}

/** One row of dots (blanks would be trimmed by the layout), repeated. */
function blank(width: number, height: number): string {
  return Array.from({ length: height }, () => ".".repeat(width)).join("\n");
}
