/** The program as a user runs it: bundled once a test file from the sources as they are, then spawned. */
import { spawnSync } from "node:child_process";
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import * as esbuild from "esbuild";
import { PROJECT } from "./source-tree.ts";

export interface Ended {
  status: number | null;
  stdout: string;
  stderr: string;
}

export interface Program {
  /** A scratch folder of this test file. */
  folder: string;
  run(words: readonly string[], options?: { input?: string; cwd?: string; env?: Record<string, string> }): Ended;
  remove(): void;
}

export async function program(): Promise<Program> {
  const folder = mkdtempSync(join(tmpdir(), "coatwright-test-"));
  const script = pathToFileURL(join(PROJECT, "build.mjs")).href;
  const { build } = (await import(script)) as { build(options: { out: string; esbuild: unknown }): Promise<unknown> };
  const out = join(folder, "dist");
  await build({ out, esbuild });
  return {
    folder,
    run(words, { input = "", cwd = folder, env = {} } = {}) {
      const { status, stdout, stderr } = spawnSync(process.execPath, [join(out, "coatwright.mjs"), ...words], {
        cwd,
        input,
        encoding: "utf8",
        env: { ...process.env, COATWRIGHT_BY: "Ana", ...env },
      });
      return { status, stdout, stderr };
    },
    remove: () => rmSync(folder, { recursive: true, force: true }),
  };
}
