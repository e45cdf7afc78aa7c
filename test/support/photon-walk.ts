/**
 * Photons walked one by one through thick layers on coated pyramids, as a second route that knows nothing of sums: each one
 * takes a way of bouncing by chance, and every bounce, interface and layer lets it on or not by chance. The rules are the
 * engine's (ways with their exits, unpolarised bounces, s or p by the toss of a coin on the way out); the sums are not.
 */
import { pyramidPaths, type Random, random, type StackLight, stackLight } from "../../engine/index.ts";

export interface PhotonScene {
  wavelengthNm: number;
  facetAngleDeg: number;
  film: { n: number; k: number; thicknessNm: number };
  substrate: { n: number; k: number };
  /** Outermost first. */
  layers: readonly { n: number; k: number; thicknessMm: number }[];
  count: number;
  seed: number;
}

/** How many photons ended where. */
export interface PhotonEnds {
  reflected: number;
  substrate: number;
  film: number;
  layers: number[];
}

/** A place a walk in the layers ends in: out, at the texture, or absorbed in the layer of that number. */
type End = "outside" | "texture" | number;

export function walkPhotons(scene: PhotonScene): PhotonEnds {
  const dice = random(scene.seed);
  const ways = pyramidPaths("random", scene.facetAngleDeg);
  const inner = scene.layers[scene.layers.length - 1].n;
  const bounces = new Map(ways.flatMap((way) => way.anglesRad.map((angleRad) => [angleRad, bounce(scene, angleRad)])));
  const ends: PhotonEnds = { reflected: 0, substrate: 0, film: 0, layers: scene.layers.map(() => 0) };

  /** Bounces off the texture: the sine in vacuum's units it leaves with, or where it was lost. */
  const texture = (): number | "substrate" | "film" => {
    let pick = dice.uniform(0, 1);
    let way = ways[0];
    for (const one of ways) {
      way = one;
      pick -= one.fraction;
      if (pick < 0) break;
    }
    for (const angleRad of way.anglesRad) {
      const { reflectance, transmittance } = bounces.get(angleRad) as StackLight;
      const chance = dice.uniform(0, 1);
      if (chance >= reflectance) return chance < reflectance + transmittance ? "substrate" : "film";
    }
    return inner * Math.sin(way.exitRad ?? Number.NaN);
  };

  for (let photon = 0; photon < scene.count; photon++) {
    let end = walkLayers(scene, dice, "outside", 0, true);
    while (end === "texture") {
      const up = texture();
      if (typeof up === "string") {
        ends[up]++;
        break;
      }
      end = walkLayers(scene, dice, "texture", up, dice.uniform(0, 1) < 0.5);
    }
    if (end === "outside") ends.reflected++;
    else if (typeof end === "number") ends.layers[end]++;
  }
  return ends;
}

function bounce({ wavelengthNm, film, substrate, layers }: PhotonScene, angleRad: number): StackLight {
  const incidenceIndex = layers[layers.length - 1].n;
  return stackLight({ wavelengthNm, angleRad, incidenceIndex, layers: [film], substrate, polarisation: "both" });
}

/** From outside or from the texture, with this n sin(angle), until it is out, at the texture or absorbed. */
function walkLayers(scene: PhotonScene, dice: Random, from: "outside" | "texture", along: number, s: boolean): End {
  const { layers, wavelengthNm } = scene;
  const deepest = layers.length - 1;
  const index = (place: number) => (place < 0 ? 1 : layers[place].n);
  const lost = (place: number) => {
    const { n, k, thicknessMm } = layers[place];
    const pathNm = (thicknessMm * 1e6) / Math.sqrt(1 - (along / n) ** 2);
    return dice.uniform(0, 1) > Math.exp((-4 * Math.PI * k * pathNm) / wavelengthNm);
  };
  let at = from === "outside" ? -1 : deepest;
  let down = from === "outside";
  if (from === "texture" && lost(at)) return at;
  for (;;) {
    const next = down ? at + 1 : at - 1;
    if (dice.uniform(0, 1) < fresnel(index(at), index(next), along, s)) down = !down;
    else at = next;
    if (at < 0) return "outside";
    if (lost(at)) return at;
    if (at === deepest && down) return "texture";
  }
}

function fresnel(na: number, nb: number, along: number, s: boolean): number {
  if (along >= na || along >= nb) return 1;
  const qa = Math.sqrt(na * na - along * along);
  const qb = Math.sqrt(nb * nb - along * along);
  return (s ? (qa - qb) / (qa + qb) : (na * na * qb - nb * nb * qa) / (na * na * qb + nb * nb * qa)) ** 2;
}
