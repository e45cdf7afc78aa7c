/** A line folder with a long history, for benchmarks: three virtual chambers, cleaned every 25 runs, all runs measured. */
import { readFileSync, writeFileSync } from "node:fs";
import { realPorts } from "../../cli/ports.ts";
import { random } from "../../engine/index.ts";
import { createLine } from "../../recipes/desk/creating.ts";
import { Workspace } from "../../recipes/index.ts";
import { DEMO_LINE } from "../../recipes/line/template.ts";
import type { AnyDraft } from "../../recipes/record/entries.ts";
import { virtualChamber } from "../../recipes/rehearsal/virtual-chamber.ts";
import { TUBE_LIKE } from "../../recipes/rehearsal/worlds.ts";

/** Makes `folder` a line folder whose book holds `runs` measured runs. */
export async function bigLine(folder: string, runs: number): Promise<void> {
  const ports = realPorts();
  await createLine(folder, ports, { demo: false, timeZone: "Europe/Lisbon" });
  writeFileSync(`${folder}/line.yaml`, DEMO_LINE);
  const ws = new Workspace(folder, ports);
  const source = random("big line");
  const start = new Map([...TUBE_LIKE.start, ["time", 660]]);
  const names = [...ws.line.chambers.keys()];
  const chambers = names.map((name) =>
    virtualChamber(TUBE_LIKE, `big ${name}`, { cellLight: ws.wafer, given: { facetFactor: 0.85 } }),
  );
  const drafts: AnyDraft[] = [];
  const units: Record<string, string> = {
    silane: "sccm",
    ammonia: "sccm",
    time: "s",
    power: "W",
    pressure: "Pa",
    temperature: "degC",
  };
  const steps = (settings: ReadonlyMap<string, number>) => [
    {
      settings: Object.fromEntries(
        [...settings].filter(([n]) => n in units).map(([n, value]) => [n, { value, unit: units[n] }]),
      ),
    },
  ];
  let at = Date.parse("2024-01-01T06:00:00Z");
  const next = () => {
    at += 20 * 60_000;
    return new Date(at).toISOString();
  };
  for (const name of names)
    drafts.push({
      kind: "recipe",
      at: next(),
      by: "bench",
      data: { chamber: name, recipe: "blue", steps: steps(start) },
    });
  for (let i = 0; i < runs; i++) {
    const c = i % names.length;
    if (i >= names.length && Math.floor(i / names.length) % 25 === 0) {
      chambers[c].clean();
      drafts.push({ kind: "clean", at: next(), by: "bench", data: { chamber: names[c] } });
    }
    const settings = new Map(start);
    for (const moved of ["silane", "ammonia", "time"])
      settings.set(moved, Math.round((start.get(moved) as number) * (1 + 0.01 * source.normal())));
    const film = chambers[c].deposit(settings);
    const read = chambers[c].measure(film, { reads: "film on polished" });
    const light = i % 7 === 0 ? chambers[c].measure(film, { reads: "light on cell" }).reflectanceMinimumNm : null;
    const index = plausible(read.index, 1.3, 4, 4);
    const thickness = plausible(read.thicknessNm, 1, 2000, 2);
    drafts.push({
      kind: "run",
      at: next(),
      by: "bench",
      data: {
        chamber: names[c],
        recipe: "blue",
        settings_from: "given",
        steps: steps(settings),
        count: 1,
        readings: [
          {
            gauge: "ellipsometer",
            on: "polished",
            ...(index === null ? {} : { index }),
            ...(thickness === null ? {} : { thickness_nm: thickness }),
          },
          ...(light === null || !(light > 300 && light < 1100)
            ? []
            : [{ gauge: "reflectometer", on: "cell" as const, reflectance_minimum_nm: Number(light.toFixed(1)) }]),
        ],
      },
    });
  }
  await ws.book.write(() => [
    {
      kind: "line file",
      data: { before: "", after: readFileSync(`${folder}/line.yaml`, "utf8"), difference: [], loosened: [] },
    },
    ...drafts,
  ]);
}

function plausible(value: number | null, low: number, high: number, digits: number): number | null {
  return value === null || !(value >= low && value <= high) ? null : Number(value.toFixed(digits));
}
