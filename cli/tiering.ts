/**
 * Tells V8 that this process is short. A verb runs for some hundred milliseconds, in which the optimising compiler spends
 * more time on functions that are nearly done than it saves on the others: it is asked to wait five times longer than usual
 * and to copy less of what is called into the caller. Imported before everything else; no answer depends on it. A process
 * that is still there after two seconds (the screens, a conversation) gets the usual values back.
 *
 * Measured with Node 20 only (see test/bench), and done with Node 20 only: later ones have a compiler more in between.
 */
import { setFlagsFromString } from "node:v8";

/** `usual` are V8's own values in Node 20. */
const usual = { budget: 67_584, inlined: 920 };
const short = { budget: 340_000, inlined: 150 };
const longMs = 2000;

function tier({ budget, inlined }: typeof usual): void {
  setFlagsFromString(`--interrupt-budget=${budget}`);
  setFlagsFromString(`--max-inlined-bytecode-size-cumulative=${inlined}`);
}

if (process.versions.node.startsWith("20.")) {
  tier(short);
  setTimeout(() => tier(usual), longMs).unref();
}
