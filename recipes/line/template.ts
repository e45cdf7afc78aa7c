/**
 * The line files that `new` writes: a blank one with one chamber, to be filled in from the top, and the demo line. Both
 * pass `readLine` as they stand.
 */

const HEAD = `# The line file: what you declare, coatwright reads. It never writes here.
#
# Quantities carry their unit: 812 sccm, 10 slm, 560 s, 8 kW, 213 Pa, 450 degC, 88 nm, 2.5 %. A point, not a comma,
# stands before decimals. A range is written 300..1200 sccm; a tolerance, 88 nm within 2 nm; a standard deviation,
# 0.85 sd 0.05. "coatwright check" says what is wrong, by row and column, and what your numbers imply.
`;

/** Text in double quotes, as YAML reads it back; JSON's escapes are a subset of YAML's. */
function quoted(text: string): string {
  return /^[A-Za-z][A-Za-z0-9 _.-]*$/.test(text) && !/^(true|false|null|yes|no|on|off)$/i.test(text.trim())
    ? text.trim()
    : JSON.stringify(text);
}

/**
 * A commented line.yaml with one chamber, for a tool nothing is known of yet. The numbers are those of a tube-like
 * chamber and are there to be replaced; common practice, no source.
 */
export function blankLine(name: string, timeZone: string): string {
  return `${HEAD}
line: ${quoted(name)}
time_zone: ${quoted(timeZone)}        # local times are read and shown in it

wafer:
  surface: pyramids              # polished | pyramids
  # facet_angle: 52 deg          # of the pyramids; 54.74 deg when left out
  facet_factor: 0.8 sd 0.1       # film on a facet / film on a polished witness; narrow it once you have measured it
  seen_from: air                 # air | glass

goal:                            # keep those you are judged by; film goals are on a polished witness, index at 632.8 nm
  index: 2.06 within 0.02
  thickness: 88 nm within 2 nm
  # weighted_reflectance: at most 2.5 %
  # reflectance_minimum: 600 nm within 15 nm

light: { from: 300 nm, to: 1100 nm, weight: photons }   # photons | power | a file: wavelength_nm,efficiency

gauges:                          # repeatability of one reading: the standard deviation of measuring one spot again
  ellipsometer: { on: polished, index: 0.003, thickness: 0.4 nm }
  # reflectometer: { on: cell, reflectance_minimum: 1.5 nm, weighted_reflectance: 0.1 % }
  # what all readings of a day share:   day_to_day: { index: 0.004, thickness: 0.5 nm }
  # certified values of the wafer that "record gauge" reads:   reference: { index: 2.045 within 0.002, thickness: 85 nm }

settings:                        # range: qualified; smallest: the step that can be typed in; tune: may be proposed
  silane: { range: 500..1000 sccm, smallest: 1 sccm, tune: true }       # full_scale: 2000 sccm keeps off the lowest 2 %
  ammonia: { range: 5000..9000 sccm, smallest: 10 sccm, tune: true }
  time: { range: 300..900 s, smallest: 1 s, tune: true }                # belt_speed on a moving belt
  power: { range: 6..10 kW, smallest: 10 W }                            # power_is: peak | average
  pressure: { range: 190..240 Pa, smallest: 1 Pa }
  temperature: { range: 430..470 degC, smallest: 1 degC }
  # your own name for one of these:       siH4_main: { acts_as: silane, range: ... }
  # a setting the tool knows nothing of:  lid_gap: { acts: linear, range: ... }

window:                          # over and above the ranges; a proposal never leaves it
  ammonia/silane: 6..13
  silane+ammonia: at most 9500 sccm

anchor:                          # how far corrections may add up from the last qualified recipe before a person looks
  ammonia/silane: 6 %
  time: 10 %

# recipes: { dark: { goal: { thickness: 80 nm within 2 nm } } }    # a recipe's own goal, where it differs
# people: { approve: [ ], override: [ ] }                          # a name under approve: changes wait for that person
# priors: { index: { ratio: -0.20 sd 0.05 }, scatter: { process: { index: 0.004, thickness: 0.6 % } } }   # known here better

chambers:
  A1: {}                         # a chamber may narrow a setting, never widen it
`;
}

/** The demo line: three chambers of an invented tube-like line. */
export const DEMO_LINE = `${HEAD}
line: Saltmarsh 2                # invented, and so are all its runs
time_zone: Europe/Lisbon

wafer:
  surface: pyramids              # polished | pyramids
  facet_angle: 52 deg            # pyramids only; 54.74 deg when left out
  facet_factor: 0.85 sd 0.05     # film on a facet / film on a polished witness
  seen_from: air                 # air | glass

goal:                            # film goals are on a polished witness, index at 632.8 nm
  index: 2.06 within 0.02
  thickness: 88 nm within 2 nm
  weighted_reflectance: at most 2.5 %
  reflectance_minimum: 600 nm within 15 nm

light: { from: 300 nm, to: 1100 nm, weight: photons }   # photons | power | quantum-efficiency.csv

gauges:                          # repeatability of one reading, and what all readings of a day share
  ellipsometer: { on: polished, index: 0.003, thickness: 0.4 nm, day_to_day: { index: 0.004, thickness: 0.5 nm } }
  reflectometer: { on: cell, reflectance_minimum: 1.5 nm, weighted_reflectance: 0.1 % }

settings:                        # smallest: what can be typed in; full_scale: the controller's
  silane: { range: 300..1200 sccm, smallest: 1 sccm, full_scale: 2000 sccm, tune: true }
  ammonia: { range: 3000..9000 sccm, smallest: 10 sccm, full_scale: 10 slm, tune: true }
  time: { range: 200..900 s, smallest: 1 s, tune: true }
  power: { range: 4..12 kW, smallest: 10 W, power_is: peak }
  pressure: { range: 180..260 Pa, smallest: 1 Pa }
  temperature: { range: 420..480 degC, smallest: 1 degC }

window:                          # the qualified window, over and above each range; never widened by the tool
  ammonia/silane: 5..14
  silane: at most 1100 sccm
  silane+ammonia: at most 9500 sccm

anchor:                          # how far corrections may add up from the last qualified recipe before a person looks
  ammonia/silane: 6 %
  time: 10 %

recipes: { dark: { goal: { thickness: 80 nm within 2 nm } } }    # a recipe's own goal; the line's goal otherwise
people: { approve: [ ], override: [ ] }   # names, recorded, not authenticated

chambers:
  A1: {}
  A2: {}
  B1: { settings: { silane: { range: 300..1000 sccm } } }        # a chamber may narrow, never widen
`;
