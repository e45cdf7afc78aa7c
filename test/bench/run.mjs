/**
 * `npm run bench [-- WORD ...]`: runs the benches in this folder (those whose file name contains one of the words, or
 * all) and prints medians and ratios. A bench is a file `NAME.bench.ts` that exports `benches`, a list of `Bench`
 * (`harness.ts`); adding one is adding that file. Ends with 1 when a bench's two ways disagree.
 */
import { mkdtempSync, readdirSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { basename, dirname, join } from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";
import { build } from "esbuild";

const here = dirname(fileURLToPath(import.meta.url));
const words = process.argv.slice(2);
const files = readdirSync(here)
  .filter((name) => name.endsWith(".bench.ts"))
  .filter((name) => words.length === 0 || words.some((word) => name.includes(word)))
  .sort();
if (files.length === 0) {
  console.error(`no bench is named like ${words.join(", ")}`);
  process.exit(2);
}

const built = mkdtempSync(join(tmpdir(), "coatwright-bench-"));
try {
  await build({
    entryPoints: [join(here, "harness.ts"), ...files.map((name) => join(here, name))],
    outdir: built,
    outExtension: { ".js": ".mjs" },
    bundle: true,
    splitting: true,
    format: "esm",
    platform: "node",
    target: "node20",
    // CommonJS libraries (yaml) ask for Node's own modules by require.
    banner: {
      js: 'import{createRequire as benchRequire}from"node:module";const require=benchRequire(import.meta.url);',
    },
    // The benches find the project by this, wherever they are bundled to.
    define: { BENCH_PROJECT: JSON.stringify(dirname(dirname(here))) },
    logLevel: "error",
  });
  const load = (name) => import(pathToFileURL(join(built, name)).href);
  const { time, inWords, usedResults } = await load("harness.mjs");
  for (const file of files) {
    const { benches } = await load(`${basename(file, ".ts")}.mjs`);
    for (const bench of benches) {
      console.log(bench.skip ? `${bench.title}\n  skipped: ${bench.skip}` : inWords(await time(bench)));
    }
  }
  console.log(`(results used: ${usedResults().toPrecision(6)})`);
} finally {
  rmSync(built, { recursive: true, force: true });
}
