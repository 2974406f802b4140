import type {
  Certificate,
  CertifiedBound,
  CertifiedCommutator,
  CertifiedCoupling,
  CertifiedLevel,
  CertifiedNode,
  CertifiedOperator,
  CertifiedState,
  CertifiedVector,
} from "./certificate-format.js";
import { readGuard } from "./recheck-read-guard.js";
import { Reader } from "./recheck-reader.js";

type Safe = CertifiedState["safe"];
type Label = CertifiedState["labels"][string];

const VERDICTS = ["good", "not good", "undecided"] as const;
const QUESTIONS = [
  "labels-insufficient",
  "coupling-undecided",
  "ambiguous-level",
  "merged-level",
  "near-degenerate",
  "strong-mixing",
] as const;
const KINDS = ["label", "energy", "perturbation", "second order"] as const;

/**
 * Reads a certificate from plain JSON: every field is there, of its type, and nothing else is.
 *
 * @param value - what `JSON.parse` gave
 * @throws GoodBasisError `file` - with the path of the first thing that does not fit
 */
export function readCertificate(value: unknown): Certificate {
  const top = new Reader(value, "");
  const format = top.field("format").choice(["goodbasis-certificate"] as const);
  const formatVersion = top.field("formatVersion").numberChoice([1] as const);
  top.only([
    "format",
    "formatVersion",
    "library",
    "n",
    "unit",
    "operators",
    "resolution",
    "verdict",
    "commutators",
    "whole",
    "levels",
    "seals",
  ]);
  const n = top.field("n").count(1);
  const whole = top.field("whole");
  whole.only(["orthonormality", "energyResidual", "energyEnclosure", "levels", "eta0", "eta"]);
  return {
    format,
    formatVersion,
    library: top.field("library").text(),
    n,
    unit: top.field("unit").text(),
    operators: top.field("operators").list(readOperator),
    resolution: top.field("resolution").number(),
    verdict: top.field("verdict").choice(VERDICTS),
    commutators: top.field("commutators").list(readCommutator),
    whole: {
      orthonormality: whole.field("orthonormality").bound(),
      energyResidual: whole.field("energyResidual").bound(),
      energyEnclosure: whole.field("energyEnclosure").bound(),
      levels: whole.field("levels").count(1),
      eta0: whole.field("eta0").bound(),
      eta: whole.field("eta").list((item) => item.bound()),
    },
    levels: top.field("levels").list((item) => readLevel(item, n)),
    seals: top.field("seals").record((item) => item.text()),
  };
}

function readOperator(item: Reader): CertifiedOperator {
  item.only(["role", "name", "hash"]);
  return {
    role: item.field("role").choice(["h0", "perturbation", "candidate"] as const),
    name: item.field("name").text(),
    hash: item.field("hash").text(),
  };
}

function readCommutator(item: Reader): CertifiedCommutator {
  item.only(["left", "right", "verdict", "norm", "bound", "atLeast"]);
  return {
    left: item.field("left").text(),
    right: item.field("right").text(),
    verdict: item.field("verdict").choice(["commutes", "broken", "undecided"] as const),
    norm: item.field("norm").bound(),
    bound: item.field("bound").bound(),
    atLeast: item.field("atLeast").bound(),
  };
}

function readLevel(item: Reader, n: number): CertifiedLevel {
  item.only([
    "energy",
    "spread",
    "degeneracy",
    "gapBelow",
    "gapAbove",
    "verdict",
    "questions",
    "safe",
    "tilt",
    "orthonormality",
    "complete",
    "couplings",
    "nodes",
    "guard",
    "states",
  ]);
  const complete = item.field("complete");
  complete.only(["energiesFound", "isolation"]);
  return {
    energy: item.field("energy").number(),
    spread: item.field("spread").bound(),
    degeneracy: item.field("degeneracy").count(1),
    gapBelow: item.field("gapBelow").orNull((x) => x.bound()),
    gapAbove: item.field("gapAbove").orNull((x) => x.bound()),
    verdict: item.field("verdict").choice(VERDICTS),
    questions: item.field("questions").list((x) => x.choice(QUESTIONS)),
    safe: readSafe(item.field("safe")),
    tilt: item.field("tilt").bound(),
    orthonormality: item.field("orthonormality").bound(),
    complete: {
      energiesFound: complete.field("energiesFound").count(0),
      isolation: complete.field("isolation").orNull((x) => x.bound()),
    },
    couplings: item.field("couplings").list(readCoupling),
    nodes: item.field("nodes").list(readNode),
    guard: readGuard(item.field("guard")),
    states: item.field("states").list((x) => readState(x, n)),
  };
}

function readSafe(item: Reader): Safe {
  item.only(["energies", "states"]);
  const energies = item.field("energies");
  const states = item.field("states");
  return {
    energies: energies.isText() ? energies.choice(["all"] as const) : energies.count(0),
    states: states.isText() ? states.choice(["all", "none"] as const) : states.count(0),
  };
}

function readCoupling(item: Reader): CertifiedCoupling {
  item.only(["perturbation", "offDiagonal", "withinLeaves", "largest"]);
  return {
    perturbation: item.field("perturbation").text(),
    offDiagonal: item.field("offDiagonal").bound(),
    withinLeaves: item.field("withinLeaves").bound(),
    largest: item.field("largest").bound(),
  };
}

function readNode(item: Reader): CertifiedNode {
  item.only(["id", "kind", "operator", "values", "states", "gap", "commutators", "residual", "couplings"]);
  return {
    id: item.field("id").count(0),
    kind: item.field("kind").choice(KINDS),
    operator: item.field("operator").text(),
    values: item.field("values").list(readPair),
    states: item.field("states").list((list) => list.list((x) => x.count(0))),
    gap: item.field("gap").bound(),
    commutators: item.field("commutators").list((x) => x.bound()),
    residual: item.field("residual").bound(),
    couplings: item.field("couplings").list(readBound),
  };
}

function readPair(item: Reader): readonly [number, number] {
  const [re, im, ...rest] = item.list((x) => x.number());
  if (re === undefined || im === undefined || rest.length > 0) throw item.malformed("two numbers [re, im]");
  return [re, im];
}

function readBound(item: Reader): CertifiedBound {
  item.only(["perturbation", "selectionRule", "direct", "counted"]);
  return {
    perturbation: item.field("perturbation").text(),
    selectionRule: item.field("selectionRule").orNull((x) => x.bound()),
    direct: item.field("direct").bound(),
    counted: item.field("counted").bound(),
  };
}

function readState(item: Reader, n: number): CertifiedState {
  item.only(["sector", "energy", "energyPlusMinus", "labels", "shifts", "safe", "limitedBy", "vector"]);
  return {
    sector: item.field("sector").count(0),
    energy: item.field("energy").number(),
    energyPlusMinus: item.field("energyPlusMinus").bound(),
    labels: item.field("labels").record(readLabel),
    shifts: item.field("shifts").list((shift) => {
      shift.only(["perturbation", "value", "plusMinus"]);
      return {
        perturbation: shift.field("perturbation").text(),
        value: shift.field("value").number(),
        plusMinus: shift.field("plusMinus").bound(),
      };
    }),
    safe: readSafe(item.field("safe")),
    limitedBy: item.field("limitedBy").text(),
    vector: readVector(item.field("vector"), n),
  };
}

function readLabel(item: Reader): Label {
  item.only(["re", "im", "radius", "text", "status", "role"]);
  return {
    re: item.field("re").number(),
    im: item.field("im").number(),
    radius: item.field("radius").bound(),
    text: item.field("text").text(),
    status: item.field("status").choice(["declared", "proposed", "measured", "not sharp"] as const),
    role: item.field("role").choice(["conserved", "descriptive", "broken"] as const),
  };
}

function readVector(item: Reader, n: number): CertifiedVector {
  item.only(["kets", "re", "im"]);
  const kets = item.field("kets").numbers();
  const re = item.field("re").numbers();
  const im = item.has("im") ? item.field("im").numbers() : undefined;
  let last = -1;
  for (let k = 0; k < kets.length; k++) {
    const ket = kets[k] as number;
    if (!Number.isInteger(ket) || ket <= last || ket >= n) {
      throw item.field("kets").malformed(`ascending ket numbers below ${n}`, `${ket} in place ${k}`);
    }
    last = ket;
  }
  if (re.length !== kets.length) throw item.field("re").malformed(`${kets.length} numbers`, `${re.length}`);
  if (im === undefined) return { kets, re };
  if (im.length !== kets.length) throw item.field("im").malformed(`${kets.length} numbers`, `${im.length}`);
  return { kets, re, im };
}
