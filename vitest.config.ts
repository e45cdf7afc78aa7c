/** How `npm test` runs: every test but the slow ones (crash, soak, package, terminal, whole processes, studies), which have
 * their own file. */
import { defineConfig } from "vitest/config";

export default defineConfig({
  test: {
    include: ["test/**/*.test.ts", "test/**/*.test.tsx"],
    exclude: ["test/slow/**", "test/study/**", "test/bench/rivals/**"],
    testTimeout: 30_000,
    // The tests share nothing but pure modules; loading these once a worker instead of once a file halves the time.
    isolate: false,
    maxWorkers: 2,
  },
});
