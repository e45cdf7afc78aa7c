/**
 * A key pressed where it does nothing, but something on another screen: what it would do, and the way there.
 */
import { commandFor } from "../keys.ts";
import { placeOf, type State } from "./state.ts";

/** "undo works on the chamber screen: q goes back to it, then u", or null when the key does nothing there either. */
export function notHere(state: State, key: string): string | null {
  const under = placeOf({ ...state, layers: [] });
  const covered = state.layers.length > 0;
  const onScreen = covered && (under === "line" || under === "chamber") ? commandFor(under, key) : null;
  if (onScreen !== null) return `${onScreen.label} works on the ${under} screen: q goes back to it, then ${key}`;
  if (under !== "line") return null;
  const inChamber = commandFor("chamber", key);
  if (inChamber === null || inChamber.id === "back") return null;
  return `${inChamber.label} works on the chamber screen: ${covered ? "q goes back, " : ""}enter opens it, then ${key}`;
}
