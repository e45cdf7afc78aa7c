/** What the code under test refused with: the stable code of the Refusal, so that tests do not depend on wording. */
import { Refusal } from "../../engine/index.ts";

/** Runs `act` and returns the code of the Refusal it throws; any other outcome is an error of the test. */
export function refusalCode(act: () => unknown): string {
  try {
    act();
  } catch (error) {
    if (error instanceof Refusal) return error.code;
    throw error;
  }
  throw new Error("nothing was refused");
}
