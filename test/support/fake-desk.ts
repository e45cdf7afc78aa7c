/**
 * A desk with an invented line of three chambers, for tests of the screens only: numbers are plausible, and follow from
 * the settings by simple made-up laws, so that a what-if moves what it should. It keeps a small book in memory.
 */

import type { RunTyped, ScreenDesk } from "../../cli/screens/desk.ts";
import { parseQuantity, Refusal, refuse } from "../../engine/index.ts";
import type {
  ChamberRow,
  ChamberView,
  Goal,
  LineOverview,
  OpenChange,
  Outlook,
  ProposalView,
  RunSeen,
  Setting,
} from "../../recipes/index.ts";

const goal: Goal = {
  index: { value: 2.06, within: 0.02 },
  thicknessNm: { value: 88, within: 2 },
  weightedReflectancePercent: { atMost: 2.5 },
  reflectanceMinimumNm: { value: 600, within: 15 },
};
const goalText = "index 2.06 ±0.02, 88 ±2 nm, weighted R at most 2.5 %, minimum 600 ±15 nm";

const setting = (
  name: string,
  dimension: Setting["dimension"],
  unit: string,
  range: string,
  smallest: string,
  tune: boolean,
): Setting => {
  const [low, high] = range.split("..").map((part) => parseQuantity(`${part} ${unit}`, dimension).value);
  const step = parseQuantity(smallest, dimension).value;
  return { name, dimension, unit, low, high, smallest: step, fullScale: null, tune, meaning: name, acts: null };
};

export const fakeSettings: readonly Setting[] = [
  setting("silane", "flow", "sccm", "300..1200", "1 sccm", true),
  setting("ammonia", "flow", "sccm", "3000..9000", "10 sccm", true),
  setting("time", "time", "s", "200..900", "1 s", true),
  setting("power", "power", "kW", "4..12", "10 W", false),
  setting("pressure", "pressure", "Pa", "180..260", "1 Pa", false),
  setting("temperature", "temperature", "degC", "420..480", "1 degC", false),
];

const start = new Map([
  ["silane", 812],
  ["ammonia", 6900],
  ["time", 560],
  ["power", 8000],
  ["pressure", 213],
  ["temperature", 450],
]);
const better = new Map([...start, ["silane", 835], ["time", 572]]);

/** Made-up laws: index rises with the ratio, thickness with silane and time. */
function filmAt(settings: ReadonlyMap<string, number>): { index: number; thicknessNm: number } {
  const get = (name: string) => settings.get(name) as number;
  const index = 2.043 + 0.62 * Math.log(get("silane") / get("ammonia") / (812 / 6900));
  const thicknessNm = 84.6 * (get("silane") / 812) ** 0.7 * (get("time") / 560) * (get("power") / 8000) ** 0.2;
  return { index, thicknessNm };
}

/** One layer on a mirror-like ground, cosine dip at four times index times thickness on a facet: shape only. */
function spectrumOf(index: number, thicknessNm: number): { nm: number[]; r: number[]; minimum: number } {
  const minimum = 4 * index * thicknessNm * 0.83;
  const nm = Array.from({ length: 81 }, (_, i) => 300 + 10 * i);
  const r = nm.map((l) => 0.008 + 0.16 * Math.cos((Math.PI / 2) * (minimum / l)) ** 2 * (l < minimum ? 1 : 1.4));
  return { nm, r, minimum };
}

export function fakeOutlook(settings: ReadonlyMap<string, number>): Outlook {
  const { index, thicknessNm } = filmAt(settings);
  const { nm, r, minimum } = spectrumOf(index, thicknessNm);
  const weighted = weightedAt(index, thicknessNm);
  const far = Math.max(Math.abs(index - 2.06) / 0.02, Math.abs(thicknessNm - 88) / 2);
  const chance = 1 / (1 + Math.exp(3 * (far - 1)));
  const around = (mean: number, half: number) => ({ mean, low: mean - half, high: mean + half });
  return {
    settings,
    film: { index, thicknessNm, covariance: [0.006 ** 2, -0.3 * 0.006 * 0.8, 0.8 ** 2] },
    predicted: {
      index: around(index, 0.013),
      thickness_nm: around(thicknessNm, 1.6),
      weighted_reflectance_percent: around(weighted, 0.06),
      reflectance_minimum_nm: around(minimum, 11),
    },
    chanceInGoal: chance,
    chances: new Map([
      ["index", chance],
      ["thickness", chance],
    ]),
    spectrum: { wavelengthNm: nm, reflectance: r, low: r.map((x) => x * 0.85), high: r.map((x) => x * 1.15) },
    current: {
      available: 46.5,
      reflected: weighted * 0.465,
      absorbedInFilm: 0.21,
      intoSilicon: 46.5 - weighted * 0.465 - 0.21,
    },
    colour: {
      hex: minimum > 620 ? "#2f56b8" : "#1b2a6b",
      words: minimum > 620 ? "light blue" : "deep blue",
      lab: [20, 10, -40],
    },
    outsideWindow:
      (settings.get("silane") as number) > 1100 ? ["silane 1101 sccm is above the window's 1100 sccm"] : [],
    cannotTell: [],
  };
}

const weightedAt = (index: number, thicknessNm: number) =>
  1.75 + 8 * (index - 2.0) ** 2 + 0.004 * (thicknessNm - 87) ** 2;

function runsOf(count: number, index: number, thicknessNm: number): RunSeen[] {
  return Array.from({ length: count }, (_, i) => {
    const wobble = Math.sin(i * 2.4);
    const afterClean = i >= count - 4;
    return {
      entry: 100 + 3 * i,
      at: `2026-03-${String(2 + i).padStart(2, "0")}T0${i % 9}:20:00+00:00`,
      sinceClean: afterClean ? 9 * (i - count + 5) : 60 + 8 * i,
      index: index + 0.004 * wobble + (afterClean ? 0 : 0.015),
      thicknessNm: thicknessNm + 0.8 * Math.cos(i * 1.7) + (afterClean ? 0 : 3),
      reflectanceMinimumNm: i % 3 === 0 ? 588 + i : null,
      weightedReflectancePercent: null,
      expected: i === 0 ? null : { index: index + 0.001, indexHalf: 0.014, thicknessNm, thicknessHalf: 1.9 },
      suspect: 0.02,
      step: 0.01,
    };
  });
}

interface FakeChamber {
  now: ReadonlyMap<string, number>;
  runs: RunSeen[];
  proposal: ProposalView | null;
  change: OpenChange | null;
  alarms: string[];
  since: number;
}

/** A fake desk; `calls` lists what was asked of it, `failNext` makes the next writing call be refused. */
export class FakeDesk implements ScreenDesk {
  readonly calls: string[] = [];
  failNext: string | null = null;
  private entries = 214;
  private readonly chambers = new Map<string, FakeChamber>([
    ["A2", { now: start, runs: runsOf(14, 2.043, 84.4), proposal: null, change: null, alarms: [], since: 37 }],
    [
      "B1",
      {
        now: new Map([...start, ["silane", 790]]),
        runs: runsOf(3, 2.055, 86.9),
        proposal: null,
        change: null,
        alarms: ["thickness of run 106 was 4.1 nm from expected: check the boat position before the next change"],
        since: 12,
      },
    ],
    ["A1", { now: better, runs: runsOf(20, 2.061, 87.8), proposal: null, change: null, alarms: [], since: 88 }],
  ]);

  overview(): LineOverview {
    this.calls.push("overview");
    return {
      line: "Saltmarsh 2",
      folder: "saltmarsh-2",
      demo: true,
      goal,
      goalText,
      lightText: "photons, 300-1100 nm",
      chambers: [...this.chambers].map(([name, chamber]) => this.row(name, chamber)),
      warnings: [],
      entries: this.entries,
      head: "5f2c",
    };
  }

  private row(name: string, chamber: FakeChamber): ChamberRow {
    const { change } = chamber;
    const chance = fakeOutlook(chamber.now).chanceInGoal as number;
    const attention =
      change === null
        ? name === "B1"
          ? "measure"
          : chance > 0.7
            ? "keep"
            : "propose"
        : change.state === "adopted"
          ? "enter"
          : change.runsSince > 0
            ? "close"
            : "measure";
    const sentences = {
      propose: "4 runs since clean, thickness 3.6 nm low",
      measure: "3 runs only, index not settled",
      keep: "steady for 20 runs",
      enter: "a change waits to be typed in",
      close: "a change has its first run",
    };
    return {
      chamber: name,
      recipe: "blue",
      goal,
      attention,
      alarm: null,
      sentence: sentences[attention],
      chanceInGoal: chance,
      depositionsSinceClean: chamber.since,
      cleaned: true,
      runs: chamber.runs.length,
      lastRuns: chamber.runs.slice(-40),
      awaitingReadings: name === "B1" ? 2 : 0,
      openChange: change,
    };
  }

  chamber(name: string): ChamberView {
    this.calls.push(`chamber ${name}`);
    const chamber = this.get(name);
    const index = Array.from({ length: 29 }, (_, i) => 1.9 + 0.0125 * i);
    const thicknessNm = Array.from({ length: 31 }, (_, i) => 65 + 1.5 * i);
    return {
      chamber: name,
      recipe: "blue",
      goal,
      goalText,
      lightText: "photons, 300-1100 nm",
      surface: "pyramids",
      settings: fakeSettings,
      now: fakeOutlook(chamber.now),
      proposal: chamber.proposal,
      runs: chamber.runs,
      openChange: chamber.change,
      learned: [
        "one per cent more silane adds 0.7 % thickness (0.5 to 0.9)",
        "index rises 0.0062 (0.0050 to 0.0074) for one per cent of ratio",
      ],
      cannotTell: [
        "ammonia hardly moved so far: its own effect on the rate is not known; one run 5 % higher would tell",
      ],
      alarms: chamber.alarms,
      plane: {
        index,
        thicknessNm,
        weightedReflectancePercent: thicknessNm.map((t) => index.map((n) => weightedAt(n, t))),
      },
    };
  }

  whatIf(_chamber: string, settings: ReadonlyMap<string, number>): Outlook {
    this.calls.push("whatIf");
    return fakeOutlook(settings);
  }

  async propose(name: string): Promise<ProposalView> {
    this.write(`propose ${name}`);
    const chamber = this.get(name);
    const change = name === "A2";
    chamber.proposal = {
      proposal: `p-${String(this.entries).padStart(6, "0")}`,
      advice: change ? "change" : name === "B1" ? "measure" : "keep",
      after: fakeOutlook(change ? better : chamber.now),
      because: [
        "thickness has been 3.6 nm low on all four runs since the clean; three times the scatter between runs",
        "more silane brings the index up and most of the thickness with it",
      ],
      cannotTell: ["whether the shift of index comes from the ratio or from the temperature"],
      alarms: chamber.alarms,
      cautions: [
        "Local codes and site management of change come first.",
        "A proposal is never a licence to bypass an interlock.",
      ],
      done: false,
    };
    return chamber.proposal;
  }

  async adopt(proposal: string, reason: string): Promise<{ change: string; sheet: string[] }> {
    this.write(`adopt ${proposal} ${reason}`);
    const [name, chamber] =
      [...this.chambers].find(([, one]) => one.proposal?.proposal === proposal) ??
      refuse("unknown-proposal", `${proposal} is not in the book`);
    const change = `c-${String(this.entries).padStart(6, "0")}`;
    const after = (chamber.proposal as ProposalView).after.settings;
    chamber.change = {
      change,
      state: "adopted",
      at: "2026-03-20T10:00:00Z",
      by: "mara",
      reason,
      before: chamber.now,
      after,
      sheet: ["silane   812 -> 835 sccm"],
      runsSince: 0,
    };
    return { change, sheet: [`at ${name}:`, "silane   812 -> 835 sccm", "time     560 -> 572 s"] };
  }

  async enter(change: string, readBack: ReadonlyMap<string, number> = new Map()): Promise<string> {
    const read = [...readBack].map(([name, value]) => ` ${name}=${value}`).join("");
    this.write(`enter ${change}${read}`);
    const chamber = this.holder(change);
    const open = chamber.change as OpenChange;
    chamber.change = { ...open, state: "entered" };
    chamber.now = new Map([...open.after, ...readBack]);
    chamber.proposal = null;
    return `${change} is in force from now`;
  }

  async logRun(name: string, run: RunTyped): Promise<string> {
    this.write(`log ${name} ${run.index} ${run.thicknessNm} ${run.reflectanceMinimumNm}`);
    const chamber = this.get(name);
    const last = chamber.runs[chamber.runs.length - 1];
    chamber.runs = [...chamber.runs, { ...last, entry: this.entries, sinceClean: last.sinceClean + 1, ...run }];
    if (chamber.change?.state === "entered")
      chamber.change = { ...chamber.change, runsSince: chamber.change.runsSince + 1 };
    return `${run.thicknessNm ?? "-"} nm, within noise of what was expected`;
  }

  async recordClean(name: string): Promise<string> {
    this.write(`clean ${name}`);
    this.get(name).since = 0;
    return `${name} is clean: a new cycle begins`;
  }

  async close(change: string): Promise<string[]> {
    this.write(`close ${change}`);
    this.holder(change).change = null;
    return [
      "as expected; 1 of 1 measured run in goal.",
      "expected index 2.061, got 2.058: as promised",
      "expected 88.1 nm, got 88.4 nm: as promised",
    ];
  }

  async undo(change: string, reason: string): Promise<string> {
    this.write(`undo ${change} ${reason}`);
    const chamber = this.holder(change);
    chamber.change = null;
    return `${change} is taken back; a change to the settings from before is open`;
  }

  refresh(): void {
    this.calls.push("refresh");
  }

  private write(what: string): void {
    if (this.failNext !== null) {
      const message = this.failNext;
      this.failNext = null;
      throw new Refusal([{ code: "stale-proposal", message, hint: "ask again with p" }]);
    }
    this.calls.push(what);
    this.entries++;
  }

  private get(name: string): FakeChamber {
    return this.chambers.get(name) ?? refuse("unknown-chamber", `${name} is not a chamber of this line`);
  }

  private holder(change: string): FakeChamber {
    return (
      [...this.chambers.values()].find((one) => one.change?.change === change) ??
      refuse("unknown-change", `${change} is not open`)
    );
  }
}
