/**
 * A contributor's first five minutes: clone, install, start. Tries the last commit, not the working folder, and fetches
 * the development packages as the lock file names them.
 */
import { existsSync } from "node:fs";
import { join } from "node:path";
import { afterAll, describe, expect, it } from "vitest";
import { emptyFolder, freshEnvironment, mustRun, outside } from "../support/outside.ts";
import { PROJECT } from "../support/source-tree.ts";

const git = ["-c", `safe.directory=${PROJECT}`, "-c", `safe.directory=${join(PROJECT, ".git")}`];
const committed =
  existsSync(join(PROJECT, ".git")) && outside("git", [...git, "rev-parse", "HEAD"], { cwd: PROJECT }).status === 0;
const folder = emptyFolder();
afterAll(() => folder.remove());

describe("a fresh clone", () => {
  it.skipIf(!committed)(
    "installs with npm ci and starts, piped, with the overview (skipped without a git commit)",
    () => {
      const clone = join(folder.path, "coatwright");
      mustRun("git", [...git, "clone", "--quiet", "--depth", "1", `file://${PROJECT}`, clone], { cwd: folder.path });
      // The machine's own npm settings and cache are used here: fetching packages is not what is being tried.
      mustRun("npm", ["ci", "--no-audit", "--no-fund"], { cwd: clone });
      const env = { ...freshEnvironment(folder.path), npm_config_update_notifier: "false" };
      const { status, stdout, stderr } = outside("npm", ["--silent", "start"], { cwd: clone, env, seconds: 120 });
      expect(status, stderr).toBe(0);
      for (const chamber of ["A1", "A2", "B1"]) expect(stdout).toContain(chamber);
      expect(outside("git", ["status", "--porcelain"], { cwd: clone }).stdout).toBe("");
    },
  );
});
