/**
 * Makes what is published: bundles `cli/main.ts` and every library it uses into `dist/`, so that the package needs no
 * dependencies and a verb starts about as fast as bare Node. Run by `prepare` (after `npm ci`, before `npm pack`).
 *
 *   dist/coatwright.mjs            the program
 *   dist/chunks/                   what is loaded only when needed, above all the screens (Ink and React)
 *   dist/THIRD-PARTY-NOTICES.txt   name, version and licence text of every package that ended in the bundle
 *
 * ESM, because the layout library behind Ink awaits at top level; a `require` is made in every file, because React is
 * CommonJS; the door to React's developer tools, which Ink opens in development only, becomes an empty module.
 */
import { chmodSync, existsSync, mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { dirname, join, relative } from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";

const PROJECT = dirname(fileURLToPath(import.meta.url));
const SHEBANG = "#!/usr/bin/env node\n";
const REQUIRE =
  'import{createRequire as bundledCreateRequire}from"node:module";const require=bundledCreateRequire(import.meta.url);';

/**
 * Takes Ink's door to React's developer tools out: an optional package that is not installed and a web socket that nobody
 * needs. Left in, a variable DEV in a user's environment makes Ink look for them, and for its own package.json.
 */
const withoutDeveloperTools = {
  name: "without-developer-tools",
  setup(build) {
    const stands = { "./devtools.js": "export default undefined;", "./utils.js": "export const isDev = () => false;" };
    build.onResolve({ filter: /^\.\/(devtools|utils)\.js$/ }, ({ importer, path }) =>
      /[\\/]node_modules[\\/]ink[\\/]/.test(importer) ? { path, namespace: "stand-in" } : undefined,
    );
    build.onLoad({ filter: /.*/, namespace: "stand-in" }, ({ path }) => ({ contents: stands[path] }));
  },
};

/** Folders (from the project) of the packages of which at least a byte is in the outputs, by esbuild's own account. */
export function packagesIn(metafile) {
  const folders = new Set();
  for (const output of Object.values(metafile.outputs)) {
    for (const [input, { bytesInOutput }] of Object.entries(output.inputs)) {
      const folder = input.match(/^(.*node_modules\/(?:@[^/]+\/)?[^/]+)\//)?.[1];
      if (folder && bytesInOutput > 0) folders.add(folder);
    }
  }
  return [...folders].sort();
}

/** The MIT licence without its title and its copyright line, from our own copy: for packages that only name it. */
function mitWording() {
  const text = readFileSync(join(PROJECT, "LICENSE"), "utf8");
  return text.slice(text.indexOf("Permission is hereby granted")).trim();
}

/** What has to be said about one package. Throws when it carries no licence text and names no licence we can quote. */
function noticeFor(folder) {
  const about = JSON.parse(readFileSync(join(folder, "package.json"), "utf8"));
  const files = readdirSync(folder).filter((name) => /^(licen[cs]e|copying|notice)(\.|-|$)/i.test(name));
  const texts = files.sort().map((name) => readFileSync(join(folder, name), "utf8").replace(/\r\n/g, "\n").trim());
  if (texts.length === 0) {
    if (about.license !== "MIT") {
      throw new Error(`${about.name} ${about.version} holds no licence text (it says: ${about.license}), find one`);
    }
    const author =
      typeof about.author === "string" ? about.author : (about.author?.name ?? `the authors of ${about.name}`);
    texts.push(`(The package names the MIT licence without its text.)\n\nCopyright (c) ${author}\n\n${mitWording()}`);
  }
  return `${about.name} ${about.version}\nLicence: ${about.license ?? "see below"}\n\n${texts.join("\n\n")}\n`;
}

/** Bundles `entry` into the folder `out` and returns the paths and sizes of what was written. */
export async function build({ entry = join(PROJECT, "cli/main.ts"), out = join(PROJECT, "dist"), esbuild }) {
  const result = await esbuild.build({
    absWorkingDir: PROJECT,
    entryPoints: { coatwright: entry },
    outdir: out,
    outExtension: { ".js": ".mjs" },
    chunkNames: "chunks/[name]-[hash]",
    bundle: true,
    splitting: true,
    format: "esm",
    platform: "node",
    target: "node20",
    define: {
      "process.env.NODE_ENV": '"production"',
      COATWRIGHT_VERSION: JSON.stringify(JSON.parse(readFileSync(join(PROJECT, "package.json"), "utf8")).version),
    },
    banner: { js: REQUIRE },
    plugins: [withoutDeveloperTools],
    // Names stay, so that an error's stack can be read.
    minifySyntax: true,
    minifyWhitespace: true,
    legalComments: "none",
    metafile: true,
    write: false,
    logLevel: "error",
  });
  // Only now is the old build touched: one that fails leaves the last good one in place.
  rmSync(out, { recursive: true, force: true });
  const written = [];
  for (const file of result.outputFiles) {
    const program = relative(out, file.path) === "coatwright.mjs";
    const text = program && !file.text.startsWith("#!") ? SHEBANG + file.text : file.text;
    mkdirSync(dirname(file.path), { recursive: true });
    writeFileSync(file.path, text);
    if (program) chmodSync(file.path, 0o755);
    written.push({ path: relative(out, file.path), bytes: Buffer.byteLength(text) });
  }
  const notices = packagesIn(result.metafile).map((folder) => noticeFor(join(PROJECT, folder)));
  const rule = `\n${"-".repeat(80)}\n\n`;
  writeFileSync(
    join(out, "THIRD-PARTY-NOTICES.txt"),
    `coatwright contains these packages, in whole or in part.\n${rule}${notices.join(rule)}`,
  );
  return written;
}

/** esbuild, or null where only the run-time parts were installed: then there is nothing to build with, and no need to. */
async function bundler() {
  try {
    return await import("esbuild");
  } catch (error) {
    if (error?.code === "ERR_MODULE_NOT_FOUND") return null;
    throw error;
  }
}

if (process.argv[1] && import.meta.url === pathToFileURL(process.argv[1]).href) {
  const esbuild = await bundler();
  if (!esbuild) console.error("coatwright: not built, the development packages are not installed");
  else if (!existsSync(join(PROJECT, "cli/main.ts"))) throw new Error("cli/main.ts is missing");
  else {
    const written = await build({ esbuild });
    const kilobytes = Math.round(written.reduce((sum, { bytes }) => sum + bytes, 0) / 1000);
    // On stderr, because `npm pack` owns stdout.
    console.error(`coatwright: built dist/ (${written.length} files, ${kilobytes} kB)`);
  }
}
