/**
 * Reads the Statistical Reference Datasets of NIST from test/fixtures/nist: data, certified values and starting points.
 * The files' own heads say on which lines each part stands; the parts are found by their words instead, so that a file
 * with shifted lines fails loudly.
 */
import { readFileSync } from "node:fs";

const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)([EeDd][+-]?\d+)?$/;

/** The numbers of a line when it holds nothing else, else null. */
function numbersOf(line: string): number[] | null {
  const words = line.trim().split(/\s+/);
  return words.every((word) => NUMBER.test(word)) ? words.map(Number) : null;
}

function linesOf(name: string): string[] {
  return readFileSync(new URL(`../fixtures/nist/${name}.dat`, import.meta.url), "utf8").split(/\r?\n/);
}

/** The rows after the last line that starts with "Data:". */
function rowsOf(lines: string[]): number[][] {
  const heading = lines.findLastIndex((line) => line.startsWith("Data:"));
  const rows = lines.slice(heading + 1).flatMap((line) => (line.trim() === "" ? [] : [numbersOf(line)]));
  if (heading < 0 || rows.length === 0 || rows.includes(null)) throw new Error("no data, or more than data");
  return rows as number[][];
}

function numberAfter(lines: string[], words: RegExp): number {
  const line = lines.find((candidate) => words.test(candidate));
  if (!line) throw new Error(`no line with ${words}`);
  return Number(line.trim().split(/\s+/).at(-1));
}

/** A linear dataset: y and the predictors as the file lists them. */
export interface NistLinear {
  y: number[];
  x: number[][];
  estimates: number[];
  standardErrors: number[];
  residualSd: number;
  rSquared: number;
}

/** Reads a linear dataset by name, such as "Longley". */
export function readNistLinear(name: string): NistLinear {
  const lines = linesOf(name);
  const rows = rowsOf(lines);
  const certified = lines.flatMap((line) => {
    const match = /^\s+B\d+\s+(\S+)\s+(\S+)\s*$/.exec(line);
    return match ? [[Number(match[1]), Number(match[2])]] : [];
  });
  return {
    y: rows.map((row) => row[0]),
    x: rows.map((row) => row.slice(1)),
    estimates: certified.map(([estimate]) => estimate),
    standardErrors: certified.map(([, error]) => error),
    residualSd: numberAfter(lines, /Standard Deviation\s+\d/),
    rSquared: numberAfter(lines, /R-Squared/),
  };
}

/** A nonlinear dataset with one predictor and two starting points. */
export interface NistNonlinear {
  y: number[];
  x: number[];
  starts: [number[], number[]];
  estimates: number[];
  standardErrors: number[];
  residualSumOfSquares: number;
  residualSd: number;
}

/** Reads a nonlinear dataset by name, such as "Misra1a". */
export function readNistNonlinear(name: string): NistNonlinear {
  const lines = linesOf(name);
  const rows = rowsOf(lines);
  const table = lines.flatMap((line) => {
    const match = /^\s*b\d+\s+=\s+(.*)$/.exec(line);
    const numbers = match && numbersOf(match[1]);
    return numbers ? [numbers] : [];
  });
  if (table.length === 0 || table.some((row) => row.length !== 4)) throw new Error(`${name}: no table of parameters`);
  return {
    y: rows.map((row) => row[0]),
    x: rows.map((row) => row[1]),
    starts: [table.map((row) => row[0]), table.map((row) => row[1])],
    estimates: table.map((row) => row[2]),
    standardErrors: table.map((row) => row[3]),
    residualSumOfSquares: numberAfter(lines, /Residual Sum of Squares/),
    residualSd: numberAfter(lines, /Residual Standard Deviation/),
  };
}
