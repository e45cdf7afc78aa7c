/**
 * The rule between measured silicon-nitride films, apart from which films they are, so that each can be left out in turn and
 * predicted from the others (`test/published/materials-nitride-evidence.test.ts` holds the numbers).
 *
 * n at a fixed wavelength is straight in the index at 632.8 nm between two neighbours, and beyond the ends carried on from
 * the last two. k follows the absorption edge (`absorption-edge.ts`) between the two neighbours that have one; beyond the ends
 * along the line from the lowest to the highest of them: the scatter between films (a factor 1.5 in k) would be blown up by
 * the short distance of the last two, whose line would give a film of index 2.3 a gap of 1.0 eV, below that of amorphous
 * silicon (about 1.7 eV); the long line gives 1.7 eV.
 */
import { type AbsorptionEdge, mixedEdge } from "./absorption-edge.ts";

/** A measured film: its index at 632.8 nm, n along wavelength (nm), and its edge where k was measured. */
export interface NitrideMember {
  readonly name: string;
  readonly index: number;
  indexAt(wavelengthNm: number): number;
  readonly edge: AbsorptionEdge | null;
}

/** Two members and how far from the first to the second an index lies. */
export interface Between {
  readonly first: NitrideMember;
  readonly second: NitrideMember;
  readonly share: number;
}

function between(first: NitrideMember, second: NitrideMember, index: number): Between {
  return { first, second, share: (index - first.index) / (second.index - first.index) };
}

/** Position of the piece that holds an index; an index at a join belongs to the piece above it, save the last. */
function pieceOf(members: readonly NitrideMember[], index: number): number {
  let i = 0;
  while (i < members.length - 2 && index >= members[i + 1].index) i++;
  return i;
}

/** The pair that gives n: the neighbours, or the last two beyond the ends. Members (two or more) in order of index. */
export function indexPair(members: readonly NitrideMember[], index: number): Between {
  const i = pieceOf(members, index);
  return between(members[i], members[i + 1], index);
}

/** The pair that gives k: neighbours among the members with an edge (two or more), the outermost two beyond the ends. */
export function edgePair(members: readonly NitrideMember[], index: number): Between {
  const known = members.filter((member) => member.edge !== null);
  const last = known.length - 1;
  if (index < known[0].index || index > known[last].index) return between(known[0], known[last], index);
  const i = pieceOf(known, index);
  return between(known[i], known[i + 1], index);
}

/** The absorption edge of the film of this index. */
export function edgeAt(members: readonly NitrideMember[], index: number): AbsorptionEdge {
  const { first, second, share } = edgePair(members, index);
  return mixedEdge(first.edge as AbsorptionEdge, second.edge as AbsorptionEdge, share);
}
