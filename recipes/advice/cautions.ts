/** The cautions that go with every proposal. They defer to local codes and authorised practice, always. */
import type { Settings } from "../../calibration/index.ts";
import type { Chamber } from "../line/line.ts";
import { shown } from "../line/settings.ts";

const always = [
  "A proposal is not an instruction: an authorised person reads, judges, approves and enters it. Local codes, site management of change and licensed practice come first; it is never a reason to bypass an interlock.",
  "Silane is pyrophoric, ammonia toxic, plasma generators lethal: leak checks, gas monitors and purge procedures apply unchanged.",
];

export function cautionsFor(chamber: Chamber, before: Settings, after: Settings): string[] {
  const out = [...always];
  for (const setting of chamber.settings.values()) {
    const from = before.get(setting.name);
    const to = after.get(setting.name);
    if (from === undefined || to === undefined || to <= from) continue;
    const words = `${setting.name} rises from ${shown(setting, from)} to ${shown(setting, to)}`;
    if (setting.meaning === "silane")
      out.push(`${words}: see that abatement, dilution and gas-monitor limits hold for the higher flow.`);
    if (setting.meaning === "ammonia") out.push(`${words}: see that exhaust treatment holds for the higher flow.`);
    if (setting.meaning === "power") out.push(`${words}: see that generator and match are rated for it.`);
  }
  return out;
}
