/**
 * `node test/study/run.mjs [WORD...] [--worlds N] [--seed TEXT] [--workers N] [--json]`: how good the chamber model is, over
 * many seeded virtual worlds. Runs the scenarios whose name contains one of the words (a word ending in "." must be the whole name), or all.
 * Worlds are TEXT-1 to TEXT-N. Develop on --seed tune (what is used when nothing is said); report on --seed report only,
 * and never choose anything by what it shows. Ends with 1 when the quick one-step way disagrees with one model a run.
 */
import { createHash } from "node:crypto";
import { mkdtempSync, readdirSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";
import { parseArgs } from "node:util";
import { Worker } from "node:worker_threads";
import { build } from "esbuild";

const here = dirname(fileURLToPath(import.meta.url));

function asked() {
  const options = {
    worlds: { type: "string", default: "60" },
    seed: { type: "string", default: "tune" },
    workers: { type: "string", default: "1" },
    json: { type: "boolean", default: false },
  };
  const { values, positionals: words } = parseArgs({ options, allowPositionals: true });
  const [worlds, workers] = ["worlds", "workers"].map((name) => {
    const number = Number(values[name]);
    if (!Number.isInteger(number) || number < 1)
      throw new Error(`--${name} is ${values[name]}, a number from 1 is needed`);
    return number;
  });
  return { words, worlds, workers, seed: values.seed, json: values.json };
}

/** A short name of the model's sources, so that a figure can be traced to what it was measured on. */
function modelName() {
  const folder = join(dirname(dirname(here)), "calibration");
  const hash = createHash("sha256");
  const files = readdirSync(folder, { recursive: true }).filter((name) => name.endsWith(".ts"));
  for (const name of files.sort()) hash.update(name).update(readFileSync(join(folder, name)));
  return hash.digest("hex").slice(0, 8);
}

/** Plays every seed on the workers; what comes back is in the order of the seeds, whoever played what. */
function playAll(workers, scenario, seeds, say) {
  const samples = new Array(seeds.length);
  let next = 0;
  let back = 0;
  let ms = 0;
  return new Promise((resolve, reject) => {
    for (const worker of workers) {
      const send = () => {
        if (next < seeds.length) worker.postMessage({ scenario, seed: seeds[next++] });
      };
      worker.removeAllListeners();
      worker.on("error", reject);
      worker.on("message", (played) => {
        samples[seeds.indexOf(played.seed)] = played.sample;
        ms += played.ms;
        back++;
        say(`${scenario} ${back} of ${seeds.length}`);
        if (back === seeds.length) resolve({ samples, msPerWorld: ms / seeds.length });
        else send();
      });
      send();
    }
  });
}

const built = mkdtempSync(join(tmpdir(), "coatwright-study-"));
const workers = [];
try {
  const { words, worlds, workers: count, seed, json } = asked();
  const model = modelName();
  await build({
    entryPoints: [join(here, "all.ts"), join(here, "worker.ts")],
    outdir: built,
    outExtension: { ".js": ".mjs" },
    bundle: true,
    splitting: true,
    format: "esm",
    platform: "node",
    target: "node20",
    logLevel: "error",
  });
  const study = await import(pathToFileURL(join(built, "all.mjs")).href);
  const meant = (name) => words.some((word) => (word.endsWith(".") ? name === word.slice(0, -1) : name.includes(word)));
  const chosen = study.scenarios.filter(({ name }) => words.length === 0 || meant(name));
  if (chosen.length === 0) throw new Error(`no scenario is named like ${words.join(", ")}`);
  for (let i = 0; i < Math.min(count, worlds); i++) workers.push(new Worker(join(built, "worker.mjs")));
  const seeds = study.seedsOf(seed, worlds);
  const say = (text) => process.stderr.isTTY && process.stderr.write(`\r\x1b[K${text}`);
  const told = [];
  if (!json)
    console.log(
      `The chamber model (sources ${model}) on virtual worlds: each figure with its standard error over worlds.\n` +
        (seed === "report"
          ? "Reporting seeds.\n"
          : "Development seeds: not to be reported; --seed report gives those.\n"),
    );
  for (const scenario of chosen) {
    const waysApart = study.checkWays(scenario, seeds);
    const { samples, msPerWorld } = await playAll(workers, scenario.name, seeds, say);
    const played = study.played(scenario, seeds, samples, { waysApart, msPerWorld });
    told.push(played);
    say("");
    if (!json) console.log(`${study.inWords(played)}\n`);
    if (waysApart !== null && waysApart > study.WAYS_MAY_DIFFER) {
      console.error(`${scenario.name}: the quick one-step way is ${waysApart} off; its figures are not one-step-ahead`);
      process.exitCode = 1;
    }
  }
  if (json) console.log(JSON.stringify({ model, seed, worlds, scenarios: told }, null, 2));
} catch (error) {
  console.error(error instanceof Error ? error.message : error);
  process.exitCode = 2;
} finally {
  for (const worker of workers) await worker.terminate();
  rmSync(built, { recursive: true, force: true });
}
