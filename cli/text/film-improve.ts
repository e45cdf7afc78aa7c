/** The improved film as text: what to set, what it gives, how flat it is, which other films come close, what holding an index costs. */
import {
  type FilmOptimum,
  flatWithinMaCm2,
  type ImprovedStack,
  type ImprovedUnknown,
  type Miss,
  metWithin,
  withinReachMaCm2,
} from "../../engine/index.ts";
import { fixed, indexText, thicknessText } from "./numbers.ts";

type What = ImprovedUnknown["what"];

const numberOf = (what: What, value: number): string => (what === "index" ? indexText(value) : thicknessText(value));
const withUnit = (what: What, value: number): string => `${numberOf(what, value)}${what === "index" ? "" : " nm"}`;
const span = (what: What, low: number, high: number): string => `${numberOf(what, low)}..${withUnit(what, high)}`;

export function improvedText(found: ImprovedStack): string {
  const { goalMet, unknowns, optima, start, held } = found;
  const [best, ...others] = optima;
  const name = (layer: number): string => `layer ${layer + 1} ${found.description.film[layer].material.name}`;
  const lines = [headline(found), ""];
  const wide = Math.max(...unknowns.map(({ layer }) => name(layer).length));
  for (const unknown of unknowns) lines.push(setLine(unknown, name(unknown.layer).padEnd(wide)));
  if (goalMet) {
    lines.push(
      `   flat: the loss grows by at most ${flatWithinMaCm2} mA/cm2${best.misses.length > 0 ? " and the goals stay met" : ""}`,
    );
  }
  lines.push("", `loss        ${lossText(best)}`);
  if (start) lines.push(`now         ${lossText(start)}${start.goalMet ? "" : "; misses the goals"}`);
  for (const miss of best.misses) lines.push(`goal        ${goalText(miss)}`);
  if (held) lines.push(...heldText(found));
  if (others.length > 0)
    lines.push(
      `other films that small steps cannot better${best.misses.length > 0 ? "" : `, within ${withinReachMaCm2} mA/cm2`}:`,
    );
  for (const other of others) lines.push(`            ${valuesText(unknowns, other)}: ${lossText(other)}`);
  return lines.join("\n");
}

function headline({ goalMet, optima, starts, evaluations }: ImprovedStack): string {
  const effort = `${starts} searches, ${evaluations} stacks`;
  if (!goalMet) return `out of reach: no film inside the ranges meets every goal; this one is nearest (${effort})`;
  return optima[0].misses.length > 0
    ? `every goal met, then the least light lost (${effort})`
    : `the least light lost (${effort})`;
}

function setLine(
  { what, value, from, to, atBound, atJoin, extrapolated, flat, flatTogether }: ImprovedUnknown,
  layer: string,
): string {
  const notes = [
    ...(flat ? [`flat ${span(what, flat.low, flat.high)}`] : []),
    ...(flatTogether ? [`with the others following ${span(what, flatTogether.low, flatTogether.high)}`] : []),
    ...(atBound ? [`at the end of its range ${span(what, from, to)}`] : []),
    ...(extrapolated ? ["beyond the measured films, extrapolated"] : []),
    ...(atJoin ? ["at a measured film of the nitride family, where its slope jumps"] : []),
  ];
  return `set ${layer}  ${what.padEnd(9)}  ${withUnit(what, value).padStart(9)}   ${notes.join("; ")}`.trimEnd();
}

function lossText({ lossMaCm2, weightedReflectancePercent }: FilmOptimum): string {
  return `${fixed(lossMaCm2, 3)} mA/cm2 do not reach the substrate; weighted reflectance ${fixed(weightedReflectancePercent, 2)} %`;
}

function valuesText(unknowns: readonly ImprovedUnknown[], { values }: FilmOptimum): string {
  return unknowns
    .map(({ layer, what }, u) => `layer ${layer + 1} ${what === "index" ? "index " : ""}${withUnit(what, values[u])}`)
    .join(", ");
}

function heldText({ held, unknowns, optima }: ImprovedStack): string[] {
  if (!held) return [];
  const asked = held.layers.map(({ layer, index }) => `layer ${layer + 1} at ${indexText(index)}`).join(", ");
  const alone = unknowns
    .filter(({ what, layer }) => what === "index" && held.layers.some((one) => one.layer === layer))
    .map(({ value }) => indexText(value))
    .join(", ");
  const lost = optima[0].goalMet ? "the goals are then out of reach" : "the goals are out of reach either way";
  const cost = held.costMaCm2 === null ? lost : `it costs ${fixed(held.costMaCm2, 3)} mA/cm2`;
  return [
    `index held  ${asked}: ${cost}; ${optima[0].misses.length > 0 ? "left free it is" : "optics alone would choose"} ${alone}`,
    `            best then ${valuesText(unknowns, held.optimum)}: ${lossText(held.optimum)}`,
  ];
}

const wholeNumber = (value: number): string => String(Number(value.toPrecision(6)));

function goalText({ wanted, found, excess }: Miss): string {
  const [name, unit, decimals] = {
    weighted: ["weighted reflectance", " %", 3] as const,
    minimum: ["reflectance minimum", " nm", 1] as const,
    spot: [`reflectance at ${wanted.kind === "spot" ? wholeNumber(wanted.wavelengthNm) : ""} nm`, " %", 3] as const,
    colour: ["colour, CIEDE2000 from the one wanted", "", 2] as const,
  }[wanted.kind];
  const { limit } = wanted;
  const asked =
    "atMost" in limit
      ? `at most ${wholeNumber(limit.atMost)}${unit}`
      : `${wholeNumber(limit.value)} within ${wholeNumber(limit.within)}${unit}`;
  const got = found === null ? "none inside the range" : `${fixed(found, decimals)}${unit}`;
  const unitOfMiss = "atMost" in limit && wanted.kind !== "colour" ? "tenths of the limit" : "tolerances";
  const missed = excess > metWithin ? `: MISSED by ${fixed(Math.max(0.01, excess), 2)} ${unitOfMiss}` : "";
  return `${name} ${got} (${asked})${missed}`;
}
