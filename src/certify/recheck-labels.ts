import { type FamilyMember, type LabelDeclaration, onlyMember, recogniseFamily } from "../audit/label-family.js";
import type { PreparedProblem } from "../audit/problem.js";
import { roundUp } from "../numerics/rounding.js";
import type { Certificate, CertifiedState } from "./certificate-format.js";
import type { OwnCandidate } from "./recheck-commutators.js";
import { type OwnOperator, type OwnProblem, productRounding } from "./recheck-operators.js";
import { join } from "./recheck-reader.js";
import type { Ledger } from "./recheck-report.js";
import type { OwnTree } from "./recheck-tree.js";
import type { Bench, Vectors } from "./recheck-vectors.js";

type Label = CertifiedState["labels"][string];

/** Eigenvalues of A closer than this fraction of ‖A‖ are taken as one, as the refinement states it. */
const LABEL_WIDTH = 2 ** -36;

/** A state is an eigenvector where its residual is within this many label widths. */
const SHARP = 16 * LABEL_WIDTH;

/** A label that holds for a whole sector stands with a residual of up to this fraction of ‖A‖, which its radius covers. */
const CARRIED = 2 ** -12;

/** Families that a recognised label may belong to. */
const RECOGNISED: readonly LabelDeclaration[] = [
  "parity",
  "j",
  "m",
  { rational: 12 },
  ...Array.from({ length: 62 }, (_, k) => ({ root: k + 3 })),
];

/** A label as the re-check met it. */
interface Met {
  readonly path: string;
  readonly label: Label;
  /** Whether a node of the certificate tells the state by this label. */
  readonly onPath: boolean;
}

/** Residual bounds of every state for one candidate. */
export interface OwnResiduals {
  readonly tight: Float64Array;
  readonly loose: Float64Array;
  /** The part of `tight` that is no rounding. */
  readonly certain: Float64Array;
}

/** Checks every label of every state: its value, radius, status, role and text. */
export function checkLabels(
  ledger: Ledger,
  certificate: Certificate,
  prepared: PreparedProblem,
  problem: OwnProblem,
  candidates: readonly OwnCandidate[],
  vectors: Vectors,
  bench: Bench,
  trees: readonly OwnTree[],
  all: boolean,
): OwnResiduals[] {
  const names = problem.candidates.map((candidate) => candidate.name);
  certificate.levels.forEach((level, l) => {
    level.states.forEach((state, k) => {
      const found = Object.keys(state.labels);
      ledger.claim(
        found.length === names.length && names.every((name) => Object.hasOwn(state.labels, name)),
        `levels[${l}].states[${k}].labels`,
        () => `expected one label for each of ${names.join(", ")}, found ${found.join(", ")}`,
      );
    });
  });
  return problem.candidates.map((candidate, place) => {
    const each = (): Float64Array => new Float64Array(vectors.count);
    const residuals = { tight: each(), loose: each(), certain: each() };
    const met: Met[] = [];
    certificate.levels.forEach((level, l) => {
      level.states.forEach((state, k) => {
        const label = Object.hasOwn(state.labels, candidate.name) ? state.labels[candidate.name] : undefined;
        if (label === undefined) return;
        const path = join(`levels[${l}].states[${k}].labels`, candidate.name);
        const steps = trees[l]?.paths[k] ?? [];
        const onPath = steps.some((node, at) => {
          const of = at % 2 === 0 ? level.nodes[node] : undefined;
          return of?.kind === "label" && of.operator === candidate.name;
        });
        met.push({ path, label, onPath });
        ledger.claim(
          label.role === candidates[place]?.role,
          `${path}.role`,
          () => `claimed to be ${label.role}; by its commutators ${candidate.name} is ${candidates[place]?.role}`,
        );
        const s = (vectors.first[l] as number) + k;
        checkNumber(ledger, candidate, vectors, bench, s, path, label, onPath, residuals);
      });
    });
    checkTexts(ledger, candidate, prepared.candidates[place]?.label, met, all);
    return residuals;
  });
}

/** The value and its radius: an eigenvalue with its residual, or an expectation value with its deviation. */
function checkNumber(
  ledger: Ledger,
  candidate: OwnOperator,
  vectors: Vectors,
  bench: Bench,
  s: number,
  path: string,
  label: Label,
  onPath: boolean,
  residuals: OwnResiduals,
): void {
  const { operator, columns, adjoint, rounding, looseRounding, name } = candidate;
  bench.image(columns, s);
  bench.project(s, s + 1);
  const mean = bench.met === 0 ? { re: 0, im: 0 } : { re: bench.re[s] as number, im: bench.im[s] as number };
  if (adjoint === undefined) mean.im = 0;
  let rho = bench.residual(s, label.re, label.im);
  if (adjoint !== undefined) {
    bench.image(adjoint, s);
    rho = Math.max(rho, bench.residual(s, label.re, -label.im));
  }
  const terms = vectors.n + 16;
  residuals.tight[s] = roundUp(rho + rounding + operator.error, terms);
  residuals.certain[s] = Math.max(0, rho - rounding) + operator.error;
  // a bound may be taken over a whole sector at once, whose vectors round in every step of the refinement
  const size = Math.sqrt(vectors.n);
  const sector =
    size * (looseRounding + operator.error) + operator.norm * (2 * size * productRounding(vectors.n) + LABEL_WIDTH);
  residuals.loose[s] = roundUp(size * rho + sector, terms);
  const vague = label.status === "not sharp";
  const what = vague
    ? `the deviation of ${name}`
    : `‖${name} q − a q‖ at a = ${label.re}${label.im === 0 ? "" : ` + ${label.im}i`}`;
  const { tight, loose, certain } = residuals;
  ledger.bound(`${path}.radius`, what, label.radius, tight[s] as number, loose[s] as number, certain[s] as number);
  ledger.claim(
    label.radius >= rho - rounding,
    path,
    () => `${what} is claimed to be within ${label.radius}, found ${rho}`,
  );
  const distance = Math.hypot(label.re - mean.re, label.im - mean.im);
  if (vague || !onPath) {
    // a sharp label is the middle of eigenvalues that were not told apart: its radius covers them
    const error = 4 * (rounding + looseRounding) + (vague ? 0 : label.radius);
    ledger.claim(
      distance <= error,
      path,
      () => `${name} is claimed to be ${label.re} + ${label.im}i on average, found ${mean.re} + ${mean.im}i`,
    );
  }
  const limit = SHARP * operator.norm;
  const most = label.role === "conserved" ? CARRIED * operator.norm : 2 * limit;
  ledger.claim(
    vague ? rho + looseRounding + operator.error > limit / 2 && !onPath : onPath || rho - rounding <= most,
    `${path}.status`,
    () => `claimed to be "${label.status}"; the state is off an eigenvector of ${name} by ${rho}`,
  );
}

/** The texts: one family for all states of a candidate. */
function checkTexts(
  ledger: Ledger,
  candidate: OwnOperator,
  declared: LabelDeclaration | undefined,
  met: readonly Met[],
  all: boolean,
): void {
  const sharp = met.filter(({ label }) => label.status !== "not sharp");
  const family = declared ?? pickFamily(candidate, sharp, all, sharp.length === met.length);
  for (const { path, label } of met) {
    if (label.status === "not sharp") {
      // a mean far below the deviation is rounding
      const clean = (x: number): number => (Math.abs(x) < 1e-12 * label.radius ? 0 : x);
      const text = `⟨${writeNumber(clean(label.re), clean(label.im))}⟩`;
      ledger.claim(
        label.text === text,
        `${path}.text`,
        () => `claimed to read "${label.text}", its number reads "${text}"`,
      );
      continue;
    }
    const member: FamilyMember | undefined = family === undefined ? undefined : onlyMember(family, label, label.radius);
    const text = member?.text ?? bareText(family, label);
    const status = member === undefined ? "measured" : declared === undefined ? "proposed" : "declared";
    ledger.claim(
      label.status === status,
      `${path}.status`,
      () => `claimed to be "${label.status}", its number makes it "${status}"`,
    );
    ledger.claim(
      label.text === text,
      `${path}.text`,
      () => `claimed to read "${label.text}", its number reads "${text}"`,
    );
  }
}

/** A number that belongs to no family: in a column of j a bare eigenvalue would be read as j. */
function bareText(family: LabelDeclaration | undefined, { re, im }: Label): string {
  return family === "j" ? `eigenvalue ${writeNumber(re, im)}` : writeNumber(re, im);
}

/** With all states at hand the family is recognised anew; otherwise it must be one that fits every text. */
function pickFamily(
  candidate: OwnOperator,
  sharp: readonly Met[],
  all: boolean,
  allSharp: boolean,
): LabelDeclaration | undefined {
  const values = sharp.map(({ label }) => label);
  const fits = (family: LabelDeclaration): boolean =>
    values.every((label) => {
      const member = onlyMember(family, label, label.radius);
      if (member === undefined) return label.status === "measured" && label.text === bareText(family, label);
      return label.status === "proposed" && member.text === label.text;
    });
  if (!all) return values.every((label) => label.status === "measured") ? undefined : RECOGNISED.find(fits);
  const widest = values.reduce((most, label) => Math.max(most, label.radius), 0);
  const radius = 4 * widest + LABEL_WIDTH * candidate.operator.norm;
  // values closer than labels are told apart are one
  const cell = (x: number): number => Math.round(x / (LABEL_WIDTH * candidate.operator.norm));
  const distinct = [...new Map(values.map((label) => [`${cell(label.re)} ${cell(label.im)}`, label])).values()];
  // how often a value occurs may tip the scales between a square and its root: both readings are honest
  const once = recogniseFamily(distinct, radius, allSharp);
  const often = recogniseFamily(values, radius, allSharp);
  return often !== undefined && (once === undefined || fits(often)) ? often : once;
}

/** A number as labels write it: six digits, a true minus sign, the part left out that is negligible. */
function writeNumber(re: number, im: number): string {
  const digits = (x: number): string => `${Number(x.toPrecision(6))}`.replaceAll("-", "−");
  const negligible = 1e-12 * Math.hypot(re, im);
  if (Math.abs(im) <= negligible) return digits(re);
  if (Math.abs(re) <= negligible) return `${digits(im)}i`;
  return `${digits(re)}${im < 0 ? "−" : "+"}${digits(Math.abs(im))}i`;
}
