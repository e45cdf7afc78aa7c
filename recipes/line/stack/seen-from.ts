/** What a stack is seen from: air, glass, or a medium of one index. */
import * as z from "zod/mini";
import { type FilmStackDescription, parseQuantity } from "../../../engine/index.ts";
import { within } from "../goal-shape.ts";
import { type Reader, read } from "../shape.ts";

// the engine divides by indices; a real index of zero is no transparent medium
const index = read((text) => within(parseQuantity(text, "number").value, 0.05, 10, ""));

/** Reads `seen_from`; undefined when it is wrong, with the problem kept in the reader. */
export function readSeenFrom(reader: Reader): FilmStackDescription["seenFrom"] | undefined {
  const path = ["seen_from"];
  const value = reader.at(path);
  if (value === undefined || value === "air") return "air";
  if (value === "glass") return "glass";
  if (Array.isArray(value)) {
    const message = "a list of thick layers in front is not available yet";
    reader.add(path, "not-available", message, "air, glass, or { index: 1.5 }");
    return undefined;
  }
  if (typeof value === "object" && value !== null) return reader.shaped(z.strictObject({ index }), path);
  reader.add(path, "wrong-value", `seen_from: "${value}" is not known here`, "air, glass, or { index: 1.5 }");
  return undefined;
}
