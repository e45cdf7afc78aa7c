/**
 * How `npm run test:slow` runs: one file at a time, because these start processes, fill disks, or play many virtual worlds.
 */
import { defineConfig } from "vitest/config";

export default defineConfig({
  test: {
    include: ["test/slow/**/*.test.ts", "test/study/*.test.ts", "test/bench/rivals/*.test.ts"],
    testTimeout: 600_000,
    hookTimeout: 600_000,
    fileParallelism: false,
  },
});
