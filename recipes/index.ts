/**
 * The one door to room `recipes/`: what is changed and why. The line as declared, the record book, advice, the desk that
 * joins them over one line folder, reports. Re-exports only.
 */
export type { Answer } from "./advice/decide.ts";
export type { Mode } from "./advice/mode.ts";
export { sharpenedWords } from "./advice/plan-words.ts";
export {
  answerDocument,
  chamberModel,
  inForce,
  type Proposed,
  predict,
  predictedDocument,
  propose,
  question,
} from "./desk/asking.ts";
export { adopt, approve, type Changed, close, enter, sheetOf, undo } from "./desk/changing.ts";
export { checkLine } from "./desk/checking.ts";
export { gaugeSentences, gaugesUntold } from "./desk/gauge-readings.ts";
export { type GaugeGiven, recordGauge } from "./desk/gauge-recording.ts";
export { type LateReadingGiven, recordReading } from "./desk/late-readings.ts";
export { learned, recordDocument } from "./desk/learned.ts";
export { chamberView, overview, proposalView, runsSeen, whatIf } from "./desk/looking.ts";
export { type Planned, plan } from "./desk/planning.ts";
export type { ReadingGiven } from "./desk/readings-given.ts";
export {
  type Given,
  type Recorded,
  type RunGiven,
  recordEvent,
  recordNote,
  recordRecipe,
  recordRun,
} from "./desk/recording.ts";
export { type Watched, type WatchedChamber, watch } from "./desk/watching.ts";
export { cleanSentence, driftSentence, forecastSentence, watchDocument } from "./desk/watching-document.ts";
export { type Why, why } from "./desk/why.ts";
export { goalText, goalWords, lightText } from "./desk/words.ts";
export { holdsLine, LINE_FILE, Workspace } from "./desk/workspace.ts";
export type { Stamp, Written } from "./desk/writing.ts";
export * from "./line/line.ts";
export { asQuantities, asQuantity, type GivenSettings, parseSet, shown, snapInside } from "./line/settings.ts";
export { readStack, stackDescription, stackUnknowns } from "./line/stack/stack-file.ts";
export { formatWhen, parseWhen } from "./line/zoned-time.ts";
export type * from "./outlook.ts";
/** Loaded when asked for: CSV reading, and the demo's virtual chambers, are no part of what a proposal waits for. */
export const importing = () => import("./desk/importing.ts");
export const correcting = () => import("./desk/correcting.ts");
export const creating = () => import("./desk/creating.ts");
export const rehearsing = () => import("./desk/rehearsing.ts");
export type { Figure, ScenarioScore, Score, WorldAsked, WorldPlayed } from "./desk/rehearsing.ts";
export type { ReplaySummary } from "./desk/replay-words.ts";
export type { Replay } from "./desk/replaying.ts";
export type { SealCount } from "./desk/shadow-words.ts";
export type { SealDocument } from "./desk/shadowing.ts";
export type { FileSystem, Ports } from "./ports.ts";
export { changeAt } from "./record/change-steps.ts";
export { openChange } from "./record/changes.ts";
export type { Quantity, StepSettings } from "./record/entries.ts";
export { fileRefusal } from "./record/file-trouble.ts";
export { changeId, parseChangeId, parseProposalId, proposalId } from "./record/ids.ts";
export { safeText } from "./record/safe-text.ts";
export { stepsOf } from "./record/steps.ts";
export { reportMarkdown } from "./report/report.ts";
