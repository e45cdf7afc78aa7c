/** Line folders in memory for tests of the desk: the demo line, or a line of virtual chambers whose truth is known. */

import { random } from "../../engine/index.ts";
import { createLine } from "../../recipes/desk/creating.ts";
import { LINE_FILE, Workspace } from "../../recipes/index.ts";
import { DEMO_LINE } from "../../recipes/line/template.ts";
import type { AnyDraft, EntryData } from "../../recipes/record/entries.ts";
import { type VirtualChamber, virtualChamber } from "../../recipes/rehearsal/virtual-chamber.ts";
import { TUBE_LIKE, type World } from "../../recipes/rehearsal/worlds.ts";
import { MemoryFiles, memoryPorts } from "./memory-files.ts";

/** After the demo's last entry. */
const now = Date.UTC(2026, 2, 20, 12);

export async function demoLine(): Promise<Workspace> {
  const ports = memoryPorts(new MemoryFiles(["/line"]));
  ports.clock.ms = now;
  return createLine("/line", ports, { demo: true, timeZone: "Europe/Lisbon" });
}

/** The demo's line file, changed by replacing text, in an empty folder. */
export function lineWith(replace: Record<string, string> = {}): Workspace {
  const files = new MemoryFiles(["/line"]);
  const ports = memoryPorts(files);
  ports.clock.ms = now;
  let text = DEMO_LINE;
  for (const [from, to] of Object.entries(replace)) {
    if (!text.includes(from)) throw new Error(`the demo line does not say "${from}"`);
    text = text.replace(from, to);
  }
  const handle = files.createExclusive(`/line/${LINE_FILE}`);
  const bytes = new TextEncoder().encode(text);
  files.write(handle, bytes, 0, bytes.length, null);
  files.close(handle);
  return new Workspace("/line", ports);
}

/** A calm world: no slips, a long cycle, no drift, so that what a test plants is all there is. */
export const calm: World = {
  ...TUBE_LIKE,
  slips: { reading: 0, setting: 0 },
  indexDriftPerCycle: 0,
  rateDriftPerCycle: 0,
};

/** A recipe that lays the demo's goal in the calm world, near enough. */
export const onGoal = new Map([
  ["silane", 808],
  ["ammonia", 6990],
  ["time", 650],
  ["power", 8000],
  ["pressure", 213],
  ["temperature", 450],
]);

const units: Record<string, string> = {
  silane: "sccm",
  ammonia: "sccm",
  time: "s",
  power: "W",
  pressure: "Pa",
  temperature: "degC",
};

export const stepsFor = (settings: ReadonlyMap<string, number>) => [
  { settings: Object.fromEntries([...settings].map(([name, value]) => [name, { value, unit: units[name] }])) },
];

export interface Played {
  ws: Workspace;
  virtual: VirtualChamber;
  /** Runs and records `times` depositions at settings; `reads` may tamper with the reading. */
  run(
    settings: ReadonlyMap<string, number>,
    times?: number,
    reads?: (r: { index: number; thicknessNm: number }) => { index: number; thicknessNm: number },
  ): Promise<void>;
  clean(): Promise<void>;
  recipe(settings: ReadonlyMap<string, number>): Promise<void>;
  note(data: EntryData["note"]): Promise<void>;
}

/** Drives a virtual chamber and writes its book, an entry an hour up to now. */
export function play(
  ws: Workspace,
  chamber: string,
  seed: string,
  given: Parameters<typeof virtualChamber>[2] = {},
): Played {
  const virtual = virtualChamber(calm, seed, given);
  let at = now - 400 * 3_600_000;
  const stamp = () => {
    at += 3_600_000;
    return new Date(at).toISOString();
  };
  const write = (draft: AnyDraft) => ws.book.append(draft);
  return {
    ws,
    virtual,
    async run(settings, times = 1, reads = (r) => r) {
      for (let i = 0; i < times; i++) {
        const read = virtual.measure(virtual.deposit(settings), { reads: "film on polished" });
        const { index, thicknessNm } = reads({ index: read.index ?? 2, thicknessNm: read.thicknessNm ?? 80 });
        await write({
          kind: "run",
          at: stamp(),
          data: {
            chamber,
            recipe: "blue",
            settings_from: "given",
            steps: stepsFor(settings),
            count: 1,
            readings: [
              {
                gauge: "ellipsometer",
                on: "polished",
                index: Number(index.toFixed(4)),
                thickness_nm: Number(thicknessNm.toFixed(2)),
              },
            ],
          },
        });
      }
    },
    async clean() {
      virtual.clean();
      await write({ kind: "clean", at: stamp(), data: { chamber } });
    },
    async note(data) {
      await write({ kind: "note", at: stamp(), data });
    },
    async recipe(settings) {
      await write({ kind: "recipe", at: stamp(), data: { chamber, recipe: "blue", steps: stepsFor(settings) } });
    },
  };
}

/** A chamber that has run `runs` times near a recipe, with real moves in its past. */
export async function settled(played: Played, recipe: ReadonlyMap<string, number>, runs = 20): Promise<void> {
  const source = random("settled");
  await played.recipe(recipe);
  for (let i = 0; i < runs; i++) {
    const settings = new Map(recipe);
    if (i % 2 === 0)
      for (const name of ["silane", "ammonia", "time"])
        settings.set(name, Math.round((recipe.get(name) as number) * (1 + 0.015 * source.normal())));
    await played.run(settings);
  }
}
