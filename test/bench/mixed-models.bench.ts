/**
 * Random intercept and slope in many groups, which the chamber filter with its sisters and R's lme4 can both fit: our whole
 * evaluation over a node grid of the program's size (4 residual, 3 intercept, 2 slope multipliers: criterion, fixed effects and their
 * covariance at each) beside lme4's compiled criterion at the same nodes, and beside one lmer() call, formula to fit. Answers
 * first: the criterion at every node, and lmer()'s own at the components it finds. lme4 maximises, we average over nodes:
 * the second is not the same work, it is what each program does to answer the same question.
 */
import { spawnSync } from "node:child_process";
import { join } from "node:path";
import { random } from "../../engine/index.ts";
import { type Components, fitAsChambers, fitAsCleans, type Group } from "../support/restricted-likelihood.ts";
import type { Bench, Way } from "./harness.ts";
import { agree, type Program, rival } from "./rivals/rival.ts";

declare const BENCH_PROJECT: string;

/** What is missing for R with lme4; loading it takes seconds, so it is asked once. */
function missing(): string | undefined {
  const asked = spawnSync("Rscript", ["-e", "library(lme4)"]);
  if (asked.error) return "R is not installed (Debian package r-cran-lme4 brings it)";
  if (asked.status !== 0) return "lme4 is not installed for R (Debian package r-cran-lme4)";
  return undefined;
}

const skip = missing();
const lme4 = (work: "criteria" | "fit"): Program =>
  skip
    ? { skip }
    : { command: "Rscript", args: [join(BENCH_PROJECT, "test", "bench", "rivals", "mixed_lme4.R"), work] };

const GROUPS = 400;
const ROWS = 10;
const truth = { residual: 600, intercept: 650, slope: 35, covariance: 10 };

/** Groups like those of a sleep study, many more of them. */
function madeUp(): Group[] {
  const source = random("mixed models");
  const a = Math.sqrt(truth.intercept);
  const b = truth.covariance / a;
  const c = Math.sqrt(truth.slope - b * b);
  return Array.from({ length: GROUPS }, (_, name) => {
    const [z1, z2] = [source.normal(), source.normal()];
    const offset = 250 + a * z1;
    const slope = 10 + b * z1 + c * z2;
    const y = Array.from({ length: ROWS }, (_, x) => offset + slope * x + Math.sqrt(truth.residual) * source.normal());
    return { name: String(name), y, rows: y.map((_, x) => [1, x]) };
  });
}

const groups = madeUp();
const start = { mean: [300, 0], sd: [1000, 200] };

/** Multipliers of the standard deviations about the truth, the program's own node grid. */
const nodes: Components[] = [0.55, 0.8, 1.2, 1.75].flatMap((process) =>
  [0.45, 1, 2.2].flatMap((step) =>
    [0.8, 1.8].map((spread) => ({
      residual: truth.residual * process ** 2,
      intercept: truth.intercept * step ** 2,
      slope: truth.slope * spread ** 2,
      covariance: truth.covariance * step * spread,
    })),
  ),
);

const line = (values: readonly number[]) => `${values.join(" ")}\n`;
const problem = () =>
  line([GROUPS, ROWS]) +
  line(groups.flatMap(({ y }) => [...y])) +
  line(nodes.flatMap((n) => [n.residual, n.intercept, n.slope ?? 0, n.covariance ?? 0]));

const total = (values: readonly number[]) => values.reduce((sum, value) => sum + value, 0);
const asChambers = () => nodes.map((node) => fitAsChambers(groups, node, start).criterion);
const asCleans = () => nodes.map((node) => fitAsCleans(groups, node, start).criterion);
const chambers: Way = { name: "filter, groups as sister chambers", run: () => total(asChambers()) };
const cleans: Way = { name: "filter, groups as cleans", run: () => total(asCleans()) };

/** Criteria near 40,000 from some ten thousand roundings on both sides. */
const AGREE = 1e-5;

const criteria = () => rival("lme4's compiled criterion", lme4("criteria"), problem, 1);
const [besideChambers, besideCleans] = [criteria(), criteria()];
const lmer = rival("one lmer()", lme4("fit"), problem, 1);
const size = `mixed model, ${GROUPS} groups of ${ROWS}`;

export const benches: Bench[] = [
  {
    title: `${size}: restricted likelihood and estimates at 24 nodes, chambers`,
    a: chambers,
    b: besideChambers,
    check: async () => agree(asChambers(), await besideChambers.answer(), AGREE, "lme4"),
    rounds: 15,
    skip,
  },
  {
    title: `${size}: restricted likelihood and estimates at 24 nodes, cleans`,
    a: cleans,
    b: besideCleans,
    check: async () => agree(asCleans(), await besideCleans.answer(), AGREE, "lme4"),
    rounds: 15,
    skip,
  },
  {
    title: `${size}: our 24 nodes beside one fit by lmer()`,
    a: chambers,
    b: lmer,
    async check() {
      const [criterion, ...rest] = await lmer.answer();
      const [fixedEffects, [residual, intercept, slope, covariance]] = [rest.slice(0, 2), rest.slice(2)];
      const fit = fitAsChambers(groups, { residual, intercept, slope, covariance }, start);
      agree([fit.criterion, ...fit.fixedEffects], [criterion, ...fixedEffects], AGREE, "lmer");
    },
    rounds: 15,
    skip,
  },
];
