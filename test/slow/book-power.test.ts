/** Power lost at every call of an append, in five thousand drawn states of the disk; and every error code at every call. */
import { expect, it } from "vitest";
import { appendTwo, callsNeeded, expectSound, STARTS } from "../support/book-faults.ts";
import { seededRandom } from "../support/memory-files.ts";

it("five thousand states of a disk after power loss hold every acknowledged entry", async () => {
  let images = 0;
  for (let round = 0; images < 5000; round++) {
    for (const start of STARTS) {
      const calls = await callsNeeded(start);
      for (let at = 1; at <= calls + 1; at++) {
        const files = await start.files();
        const { acknowledged } = await appendTwo(files, { at, how: "killed" });
        for (let image = 0; image < 5; image++) {
          const seed = round * 1_000_003 + at * 1009 + image * 7919;
          const told = `${start.name}, power lost at call ${at}, seed ${seed}`;
          await expectSound(files.afterPowerLoss(seededRandom(seed)), [...start.acknowledged, ...acknowledged], told);
          images++;
        }
      }
    }
  }
  expect(images).toBeGreaterThanOrEqual(5000);
});

it("every error code at every call, once and from then on, loses nothing acknowledged", async () => {
  let cases = 0;
  for (const start of STARTS) {
    const calls = await callsNeeded(start);
    for (const how of ["EIO", "ENOSPC", "EDQUOT", "EACCES", "EROFS", "EMFILE"]) {
      for (const from of ["once", "from then on"] as const) {
        for (let at = 1; at <= calls; at++) {
          const files = await start.files();
          const { acknowledged } = await appendTwo(files, { at, how, from });
          await expectSound(files, [...start.acknowledged, ...acknowledged], `${start.name}: ${how} ${from} at ${at}`);
          cases++;
        }
      }
    }
  }
  expect(cases).toBeGreaterThan(1000);
});
