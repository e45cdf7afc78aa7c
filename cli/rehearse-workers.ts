/**
 * The worlds of a rehearsal on several cores. This file is both ends: loaded by the verb it hands worlds out, loaded by a
 * worker thread it plays those it is sent. Run from source, where no thread can load it, worlds are played one by one
 * here. What comes back is in the order asked, whoever played what.
 */
import { isMainThread, parentPort, Worker, workerData } from "node:worker_threads";
import { rehearsing, type WorldAsked, type WorldPlayed } from "../recipes/index.ts";

/** What tells a thread that it was started for this. */
const PART = "coatwright rehearsal";

interface Back {
  at: number;
  played?: WorldPlayed;
  error?: string;
}

if (!isMainThread && workerData === PART)
  parentPort?.on("message", async ({ at, world }: { at: number; world: WorldAsked }) => {
    try {
      const { playWorld } = await rehearsing();
      parentPort?.postMessage({ at, played: playWorld(world) } satisfies Back);
    } catch (error) {
      parentPort?.postMessage({ at, error: String(error instanceof Error ? error.stack : error) } satisfies Back);
    }
  });

/** Plays the worlds on up to `workers` threads; `progress` is told how many are back. */
export async function playWorlds(
  worlds: readonly WorldAsked[],
  workers: number,
  progress: (back: number) => void,
): Promise<WorldPlayed[]> {
  const threads = Math.min(workers, worlds.length);
  if (import.meta.url.endsWith(".ts") || threads <= 1) return playHere(worlds, progress);
  const pool = Array.from({ length: threads }, () => new Worker(new URL(import.meta.url), { workerData: PART }));
  try {
    return await handOut(pool, worlds, progress);
  } finally {
    await Promise.all(pool.map((worker) => worker.terminate()));
  }
}

async function playHere(worlds: readonly WorldAsked[], progress: (back: number) => void): Promise<WorldPlayed[]> {
  const { playWorld } = await rehearsing();
  const out: WorldPlayed[] = [];
  for (const world of worlds) {
    out.push(playWorld(world));
    progress(out.length);
    // Timers and signals get their turn between worlds.
    await new Promise((resolve) => setImmediate(resolve));
  }
  return out;
}

function handOut(
  pool: readonly Worker[],
  worlds: readonly WorldAsked[],
  progress: (back: number) => void,
): Promise<WorldPlayed[]> {
  const out = new Array<WorldPlayed>(worlds.length);
  let next = 0;
  let back = 0;
  return new Promise((resolve, reject) => {
    for (const worker of pool) {
      const send = () => {
        if (next >= worlds.length) return;
        const at = next++;
        worker.postMessage({ at, world: worlds[at] });
      };
      worker.on("error", reject);
      worker.on("message", ({ at, played, error }: Back) => {
        if (!played) {
          reject(new Error(`a world could not be played: ${error}`));
          return;
        }
        out[at] = played;
        back++;
        progress(back);
        if (back === worlds.length) resolve(out);
        else send();
      });
      send();
    }
  });
}
