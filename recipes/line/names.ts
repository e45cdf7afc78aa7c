/**
 * Names that people choose for chambers, recipes, gauges and settings. They become file names, words on a command line
 * and column headings, so they are plain ASCII; two that differ only in capitals would be one file on some systems.
 */

const NAME = /^[A-Za-z0-9][A-Za-z0-9._-]{0,63}$/;
/** Settings also stand in expressions (a/b, a+b, step.setting), so they do without marks. */
const SETTING_NAME = /^[A-Za-z][A-Za-z0-9_]{0,63}$/;
/** Device names of Windows, with or without an extension. */
const RESERVED = /^(con|prn|aux|nul|com[1-9]|lpt[1-9])(\..*)?$/i;

/** Why this cannot be the name of a chamber, recipe or gauge, as a sentence with what would do; null when it can. */
export function nameProblem(name: string): { message: string; hint: string } | null {
  const hint = "use letters A-Z, digits, and . _ - after the first; at most 64 characters";
  if (!NAME.test(name)) return { message: `"${name}" cannot be a name here`, hint };
  if (name.includes("..") || name.endsWith(".")) return { message: `"${name}" cannot be a file name`, hint };
  if (RESERVED.test(name)) return { message: `"${name}" is a reserved name on some systems`, hint: "choose another" };
  return null;
}

/** The same for a setting: letters, digits and underscores, beginning with a letter. */
export function settingNameProblem(name: string): { message: string; hint: string } | null {
  if (SETTING_NAME.test(name)) return null;
  const hint = "use letters A-Z, digits and _, beginning with a letter; at most 64 characters";
  return { message: `"${name}" cannot be the name of a setting`, hint };
}

/** Names that equal an earlier one except for capitals, each with the earlier one. */
export function sameButCapitals(names: Iterable<string>): { name: string; earlier: string }[] {
  const seen = new Map<string, string>();
  const clashes: { name: string; earlier: string }[] = [];
  for (const name of names) {
    const earlier = seen.get(name.toLowerCase());
    if (earlier === undefined) seen.set(name.toLowerCase(), name);
    else clashes.push({ name, earlier });
  }
  return clashes;
}
