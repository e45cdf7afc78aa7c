/**
 * What is published, tried as a user gets it: packed, installed into an empty folder without a network, and run there.
 */
import { existsSync, readdirSync, readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { emptyFolder, freshEnvironment, mustRun, outside } from "../support/outside.ts";
import { PROJECT } from "../support/source-tree.ts";

const about = JSON.parse(readFileSync(join(PROJECT, "package.json"), "utf8"));
const folder = emptyFolder();
const env = freshEnvironment(folder.path);
const installed = join(folder.path, "node_modules", "coatwright");
const command = join(folder.path, "node_modules", ".bin", "coatwright");

beforeAll(() => {
  const packed = mustRun("npm", ["pack", "--silent", "--pack-destination", folder.path], { cwd: PROJECT });
  const tarball = packed.trim().split("\n").at(-1)!;
  writeFileSync(
    join(folder.path, "package.json"),
    JSON.stringify({ name: "somebody", version: "1.0.0", private: true }),
  );
  // An empty home means an empty cache, and offline means no network: whatever is needed must be in the tarball.
  mustRun("npm", ["install", "--offline", "--no-audit", "--no-fund", join(folder.path, tarball)], {
    cwd: folder.path,
    env,
  });
});
afterAll(() => folder.remove());

describe("the packed program", () => {
  it("installs into an empty folder without a network, and brings no other package along", () => {
    const packages = readdirSync(join(folder.path, "node_modules")).filter((name) => !name.startsWith("."));
    expect(packages).toEqual(["coatwright"]);
  });

  it("holds the bundle, the licence and the notices, and no source or test", () => {
    expect(existsSync(join(installed, "LICENSE"))).toBe(true);
    expect(existsSync(join(installed, "dist", "THIRD-PARTY-NOTICES.txt"))).toBe(true);
    const top = readdirSync(installed).filter(
      (name) => !["LICENSE", "README.md", "dist", "package.json"].includes(name),
    );
    expect(top).toEqual([]);
  });

  it("says its version", () => {
    const { status, stdout, stderr } = outside(command, ["--version"], { cwd: folder.path, env });
    expect(stderr).toBe("");
    expect(status).toBe(0);
    expect(stdout).toContain(about.version);
  });

  it("prints the overview as plain text and ends when there is no terminal", () => {
    const { status, stdout, stderr } = outside(command, [], { cwd: folder.path, env, seconds: 60 });
    expect(status, stderr).toBe(0);
    for (const chamber of ["A1", "A2", "B1"]) expect(stdout).toContain(chamber);
    expect(stdout).not.toContain("\u001b");
  });

  it("runs the same when a variable DEV is set, which the screens' library would otherwise act upon", () => {
    const { status, stderr } = outside(command, [], { cwd: folder.path, env: { ...env, DEV: "true" }, seconds: 60 });
    expect(status, stderr).toBe(0);
  });

  it("names every package in the bundle with its licence, those that draw the screens and read the files among them", () => {
    const notices = readFileSync(join(installed, "dist", "THIRD-PARTY-NOTICES.txt"), "utf8").split(
      `\n${"-".repeat(80)}\n`,
    );
    const named = new Map(notices.slice(1).map((notice) => [notice.trim().split(" ")[0], notice] as const));
    for (const name of ["ink", "react", "yoga-layout", "yaml", "zod"]) expect([...named.keys()]).toContain(name);
    for (const [name, notice] of named) {
      expect(notice, name).toMatch(/\nLicence: \S+/);
      // Every licence we ship under has a copyright line and more words than a title.
      expect(notice, name).toMatch(/copyright/i);
      expect(notice.length, name).toBeGreaterThan(500);
    }
  });
});
