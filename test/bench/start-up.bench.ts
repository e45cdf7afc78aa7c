/**
 * What a verb costs before it does anything: the built program saying its version, beside bare Node, whole processes.
 */
import { existsSync } from "node:fs";
import { join } from "node:path";
import { type Bench, nodeProcess } from "./harness.ts";

declare const BENCH_PROJECT: string;

const program = join(BENCH_PROJECT, "dist", "coatwright.mjs");
const version = nodeProcess("coatwright --version", [program, "--version"], BENCH_PROJECT);

export const benches: Bench[] = [
  {
    title: "start-up: the program's shortest verb over bare Node",
    a: version,
    b: nodeProcess("node -e 0", ["-e", "0"], BENCH_PROJECT),
    check() {
      if (!/\d+\.\d+\.\d+/.test(version.output())) throw new Error("--version does not print a version");
    },
    rounds: 21,
    skip: existsSync(program) ? undefined : "dist/coatwright.mjs is not built (npm run prepare)",
  },
];
