/**
 * Where a line asks for no index, nothing but habit holds it: what optics alone would choose, and what staying costs in light.
 */
import { nitrideMemberIndices, opticsChoice } from "../../engine/index.ts";
import type { Answer, Question } from "../advice/decide.ts";
import { waferDescription } from "../line/line-wafer.ts";

/** Film on the surface that is looked through, nm. */
const thicknessRange = [40, 130] as const;

/** Null where an index is asked for, or the film in force lies outside the measured nitride films. */
export function opticsAlone({ line, goal, light }: Question, { now }: Answer): string | null {
  if (goal.index) return null;
  const measured = nitrideMemberIndices();
  const indexRange = [measured[0], measured[measured.length - 1]] as const;
  const held = now.film.index;
  if (held < indexRange[0] || held > indexRange[1]) return null;
  const choice = opticsChoice(waferDescription(line), { indexRange, thicknessRange, heldIndex: held });
  const witness = (nm: number) => (nm / light.facet.mean).toFixed(0);
  const cost = (choice.costMaCm2 ?? 0).toFixed(2);
  return `No index is asked for, so it is left near ${held.toFixed(3)}. Optics alone would choose index ${choice.free.index.toFixed(2)} and ${witness(choice.free.thicknessNm)} nm (reflection and absorption least); staying costs ${cost} mA/cm2.`;
}
