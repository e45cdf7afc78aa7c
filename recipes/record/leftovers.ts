/** Files that a writer which died on the way may have left beside the book: harmless, for `check` to name. */
import type { Ports } from "../ports.ts";
import { fileRefusal } from "./file-trouble.ts";

const LEFT = [
  { pattern: /^\..+\.tmp-\d+-[0-9A-Za-z-]+$/, what: "a file that was to replace another" },
  { pattern: /^book\.lock\.broken-/, what: "a lock that was being broken" },
  { pattern: /^book\.lock\.[0-9A-Za-z-]+$/, what: "a lock that was being taken" },
] as const;

/** Names in the line folder that look left over, with what they were; may also be in use at this very moment. */
export function leftovers(folder: string, ports: Pick<Ports, "files">): { file: string; what: string }[] {
  let names: string[];
  try {
    names = ports.files.list(folder);
  } catch (error) {
    throw fileRefusal(error, "list the line folder", folder);
  }
  return names.flatMap((file) => {
    const left = LEFT.find(({ pattern }) => pattern.test(file));
    return left ? [{ file, what: left.what }] : [];
  });
}
