/** The usual practices and the oracle, in the order of the table. This program's own is joined from outside. */
import { doubleEwma } from "./double-ewma.ts";
import { ewmaFast, ewmaSlow } from "./ewma.ts";
import { factorial } from "./factorial.ts";
import { oneFactor } from "./one-factor.ts";
import { oracle } from "./oracle.ts";
import type { Practice } from "./practice.ts";
import { proportional } from "./proportional.ts";
import { tunedEwma } from "./tuned-ewma.ts";

export const usualPractices: readonly Practice[] = [
  proportional,
  oneFactor,
  factorial,
  ewmaSlow,
  ewmaFast,
  doubleEwma,
  tunedEwma,
];
export { oracle };
