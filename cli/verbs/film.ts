/** The verb `film`: optics of a stack file, the film that does best inside the ranges left open, colours by thickness. */
import {
  colourOfLayer,
  filmColours,
  filmStack,
  improveStack,
  parseQuantity,
  Refusal,
  refuse,
} from "../../engine/index.ts";
import { readStack, stackDescription, stackUnknowns } from "../../recipes/index.ts";
import { filmText } from "../text/film.ts";
import { coloursText } from "../text/film-colours.ts";
import { improvedText } from "../text/film-improve.ts";
import { coloursDocument, improvedDocument } from "./film-document.ts";
import { type Call, flag, type Outcome, toggle, type Verb, word } from "./verb.ts";

type Stack = ReturnType<typeof readStack>;

export const filmVerbs: Verb[] = [
  {
    name: "film",
    does: "optics of any stack: reflectance, transmittance, absorptance of each layer, currents, colour; the best film; colours",
    words: [word("stack", "the stack file")],
    flags: [
      toggle("improve", "the best values for what `may be 40..120 nm`: goals met first, then the least light lost"),
      toggle("colours", "the colour of the stack as one layer grows"),
      flag("layer", "N", "with --colours: which layer, 1 the outermost; may be left out where there is one"),
      flag("from", "20nm", "with --colours: the first thickness, 20 nm when left out"),
      flag("to", "140nm", "with --colours: the last thickness, 140 nm when left out"),
      flag("step", "5nm", "with --colours: between two thicknesses, 5 nm when left out"),
    ],
    examples: [
      "coatwright film stack.yaml",
      "coatwright film stack.yaml --json",
      "coatwright film stack.yaml --improve",
      "coatwright film stack.yaml --colours --from 60nm --to 100nm --step 2nm",
    ],
    writes: false,
    run: (call): Outcome => {
      const improve = call.args.switch("improve");
      const colours = call.args.switch("colours");
      if (improve && colours) refuse("bad-argument", "--improve and --colours are asked for one at a time");
      const stray = ["layer", "from", "to", "step"].find((name) => call.args.has(name));
      if (stray && !colours) refuse("bad-argument", `--${stray} belongs to --colours`);
      const stack = stackOf(call, improve);
      if (improve) return improved(stack, call.args.need("stack"));
      if (colours) return coloursOf(stack, call);
      const answer = filmStack(stackDescription(stack));
      const notices = Object.keys(stack.goal).length > 0 ? ["the goal in the file is looked at with --improve"] : [];
      return { document: { ...answer }, text: filmText(answer, stack), notices };
    },
  },
];

function stackOf(call: Call, improve: boolean): Stack {
  const file = call.args.need("stack");
  const folder = file.includes("/") ? file.slice(0, file.lastIndexOf("/") + 1) : "";
  const beside = (name: string) => call.readFile(name.startsWith("/") ? name : folder + name);
  return readStack(call.readFile(file), file, beside, { improve });
}

function improved(stack: Stack, file: string): Outcome {
  const unknowns = stackUnknowns(stack);
  if (unknowns.length === 0) {
    const hint = "write a thickness as in may be 40..120 nm, or the index of silicon nitride as in may be 1.95..2.13";
    refuse("nothing-to-improve", "no thickness or index of the film may be changed", { file, hint });
  }
  const found = atFile(file, () => improveStack(stackDescription(stack), unknowns, stack.goal));
  const answer = filmStack(found.description);
  return {
    document: { ...answer, improved: improvedDocument(found) },
    text: `${improvedText(found)}\n\n${filmText(answer, { ...stack, film: found.description.film })}`,
    exit: found.goalMet ? 0 : 3,
  };
}

function coloursOf(stack: Stack, call: Call): Outcome {
  const { args } = call;
  const length = (name: string, otherwise: string): number =>
    parseQuantity(args.text(name) ?? otherwise, "length").value;
  const range = { fromNm: length("from", "20 nm"), toNm: length("to", "140 nm"), stepNm: length("step", "5 nm") };
  const layer = layerNamed(args.text("layer"), stack.film.length);
  const found = filmColours(colourOfLayer(stackDescription(stack), layer), range);
  const { name } = stack.film[layer].material;
  return { document: coloursDocument(layer, name, found), text: coloursText(layer, name, found) };
}

function layerNamed(written: string | undefined, layers: number): number {
  if (layers === 0) refuse("no-layers", "the film of this stack has no layers");
  if (written === undefined) {
    if (layers > 1)
      refuse("missing-argument", `which of the ${layers} layers grows?`, { hint: "--layer 1 is the outermost" });
    return 0;
  }
  const layer = /^\d+$/.test(written.trim()) ? Number(written) : Number.NaN;
  if (!(layer >= 1 && layer <= layers))
    refuse("unknown-layer", `--layer ${written}: the film has layers 1 to ${layers}`);
  return layer - 1;
}

/** Runs the search; what it refuses is a problem of this file. */
function atFile<T>(file: string, act: () => T): T {
  try {
    return act();
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    throw new Refusal(error.problems.map((problem) => ({ ...problem, file: problem.file ?? file })));
  }
}
