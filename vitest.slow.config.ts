/** How `npm run test:slow` runs: one file at a time, because these start processes and fill disks. */
import { defineConfig } from "vitest/config";

export default defineConfig({
  test: { include: ["test/slow/**/*.test.ts"], testTimeout: 600_000, hookTimeout: 600_000, fileParallelism: false },
});
