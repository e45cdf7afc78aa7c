/**
 * The "did you mean" of every door: the known word nearest to one that is not known. Small and strict, because a wrong
 * suggestion costs more than none.
 */

/** Edits (insert, delete, replace, swap of neighbours) between two words; the optimal string alignment distance. */
function editDistance(a: string, b: string): number {
  let beforeLast: number[] = [];
  let last = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++) {
      const replaced = last[j - 1] + (a[i - 1] === b[j - 1] ? 0 : 1);
      let best = Math.min(last[j] + 1, row[j - 1] + 1, replaced);
      if (i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1])
        best = Math.min(best, beforeLast[j - 2] + 1);
      row.push(best);
    }
    beforeLast = last;
    last = row;
  }
  return last[b.length];
}

/**
 * Returns the known word nearest to `word`, or null when none is near: at most one edit in words of up to five letters,
 * two in longer ones; capitals, spaces, `-` and `_` do not count as edits. Words over 64 letters get no suggestion.
 */
export function nearestWord(word: string, known: Iterable<string>): string | null {
  if (word.length > 64) return null;
  const plain = (text: string) => text.toLowerCase().replace(/[\s_-]/g, "");
  const asked = plain(word);
  let best: string | null = null;
  let bestDistance = asked.length <= 5 ? 2 : 3;
  for (const candidate of known) {
    const distance = editDistance(asked, plain(candidate));
    if (distance < bestDistance) {
      best = candidate;
      bestDistance = distance;
    }
  }
  return best;
}
