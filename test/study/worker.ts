/** A worker of the study: plays the worlds it is sent, one at a time, and posts what each gave and how long it took. */
import { parentPort } from "node:worker_threads";
import { scenarioNamed } from "./all.ts";

parentPort?.on("message", ({ scenario, seed }: { scenario: string; seed: string }) => {
  const began = performance.now();
  const sample = scenarioNamed(scenario).play(seed);
  parentPort?.postMessage({ seed, sample, ms: performance.now() - began });
});
