/** One proposal on a book of 2,000 measured runs, whole process, beside bare Node: what an engineer waits for. */
import { existsSync, mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { bigLine } from "../support/big-line.ts";
import { type Bench, nodeProcess } from "./harness.ts";

declare const BENCH_PROJECT: string;

const program = join(BENCH_PROJECT, "dist", "coatwright.mjs");
const folder = mkdtempSync(join(tmpdir(), "coatwright-bench-"));
process.on("exit", () => rmSync(folder, { recursive: true, force: true }));
await bigLine(folder, 2000);
const ask = nodeProcess(
  "coatwright propose",
  [program, "propose", "--chamber", "A2", "--dry-run", "--json", "--line", folder],
  BENCH_PROJECT,
);

export const benches: Bench[] = [
  {
    title: "propose: one proposal on a book of 2,000 runs over bare Node",
    a: ask,
    b: nodeProcess("node -e 0", ["-e", "0"], BENCH_PROJECT),
    check() {
      const { advice, predicted } = JSON.parse(ask.output()) as {
        advice: string;
        predicted: { index: { mean: number } };
      };
      if (!["change", "keep", "measure"].includes(advice) || !(predicted.index.mean > 1.9))
        throw new Error(`an odd answer: ${advice}`);
    },
    rounds: 11,
    skip: existsSync(program) ? undefined : "dist/coatwright.mjs is not built (npm run prepare)",
  },
];
