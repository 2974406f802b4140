import { GoodBasisError } from "../errors.js";
import { isObject, requireKnown, shown } from "../misuse.js";
import { isMatrixInput, type MatrixInput } from "../operator/input.js";
import { Operator } from "../operator/operator.js";
import { modulusAbove } from "../operator/radius.js";
import { checkDeclaration, type LabelDeclaration } from "./label-family.js";
import { LARGEST_CANDIDATE, LARGEST_ENERGY } from "./resolution.js";

/** A candidate conserved operator together with what the caller knows of it. */
export interface Candidate {
  /** The operator, n × n; Hermitian, unitary or any other normal matrix. */
  readonly operator: MatrixInput;
  /** The discrete family that its eigenvalues belong to; labels are snapped to it and count as declared. */
  readonly label?: LabelDeclaration;
  /**
   * A ladder operator that raises this label by one step; it fixes the relative phases of a multiplet so that its matrix
   * elements are real and positive (Condon and Shortley, The Theory of Atomic Spectra, 1935).
   */
  readonly ladder?: MatrixInput;
}

/**
 * The problem H(λ) = H0 + λ V and the operators that may be conserved.
 *
 * All matrices are n × n over the same kets, in the same order.
 */
export interface Problem<K extends string = string, P extends string = string> {
  /** The unperturbed Hamiltonian; Hermitian. */
  readonly h0: MatrixInput;
  /** The perturbation, Hermitian; or several by name, for a basis that is good for all of them. */
  readonly v: MatrixInput | Readonly<Record<P, MatrixInput>>;
  /** Candidate conserved operators by name. The names become the names of the labels. */
  readonly candidates?: Readonly<Record<K, MatrixInput | Candidate>>;
  /** Names of the n kets; by default their numbers, from 0. */
  readonly kets?: readonly string[];
  /** Unit of all energies, for display only. */
  readonly unit?: string;
}

/** A perturbation by name. */
export interface NamedOperator {
  readonly name: string;
  readonly operator: Operator;
}

/** A candidate, checked and read. */
export interface PreparedCandidate extends NamedOperator {
  readonly kind: "hermitian" | "unitary" | "normal";
  /** The adjoint; the operator itself where it is Hermitian. */
  readonly adjoint: Operator;
  readonly label: LabelDeclaration | undefined;
  readonly ladder: Operator | undefined;
}

/** A problem, checked and read. */
export interface PreparedProblem {
  readonly n: number;
  readonly h0: Operator;
  readonly perturbations: readonly NamedOperator[];
  readonly candidates: readonly PreparedCandidate[];
  /** Name of ket i. */
  readonly ket: (i: number) => string;
  readonly kets: readonly string[] | undefined;
  readonly unit: string;
}

const FIELDS = ["h0", "v", "candidates", "kets", "unit"];
const CANDIDATE_FIELDS = ["operator", "label", "ladder"];

/** Fields by which one matrix is told from a record of named ones; no perturbation may be called so. */
const MATRIX_FIELDS = ["re", "im", "entries", "diagonal", "permutation"];

/**
 * Reads and checks a problem.
 *
 * @throws GoodBasisError `shape`, `not-finite`, `not-hermitian`, `not-normal`, `name`, `option`: with the operator, the place
 *   and size
 */
export function prepareProblem(problem: Problem): PreparedProblem {
  if (!isObject(problem) || Array.isArray(problem)) {
    throw new GoodBasisError("option", `the problem is ${shown(problem)}; give { h0, v, candidates }`, { problem });
  }
  requireKnown("the problem", problem, FIELDS);
  const { candidates: given = {}, unit = "" } = problem;
  if (!isObject(given) || Array.isArray(given) || given instanceof Map || given instanceof Operator) {
    const message = `candidates is ${shown(given)}; give an object, one operator by name: { Jz: matrix, … }`;
    throw new GoodBasisError("option", message, {});
  }
  if (typeof unit !== "string") {
    throw new GoodBasisError("option", `unit is ${shown(unit)}; give it as text, such as "cm⁻¹"`, { unit });
  }
  const h0 = hermitian("H0", read("H0", problem.h0, LARGEST_ENERGY));
  const n = h0.n;
  const perturbations = readPerturbations(problem.v, n);
  const candidates: PreparedCandidate[] = [];
  for (const [name, input] of Object.entries(given)) {
    checkName("candidate", name);
    if (name === "H0" || perturbations.some((v) => v.name === name)) {
      throw new GoodBasisError("name", `candidate "${name}" has the name of H0 or of a perturbation; rename it`, {
        name,
      });
    }
    candidates.push(readCandidate(name, input, n));
  }
  const kets = problem.kets === undefined ? undefined : checkKets(problem.kets, n);
  return {
    n,
    h0,
    perturbations,
    candidates,
    kets,
    ket: kets === undefined ? (i) => String(i) : (i) => kets[i] as string,
    unit,
  };
}

function read(name: string, input: MatrixInput, largest: number): Operator {
  try {
    return notTooLarge(name, Operator.from(input), largest);
  } catch (error) {
    if (!(error instanceof GoodBasisError) || "operator" in error.details) throw error;
    throw new GoodBasisError(error.code, `${name}: ${error.message}`, { ...error.details, operator: name });
  }
}

/** Refuses entries so large that products of operators would leave the range of doubles somewhere further on. */
function notTooLarge(name: string, operator: Operator, largest: number): Operator {
  const { csr } = operator;
  const radius = operator.isExact ? undefined : operator.radius;
  for (let row = 0; row < csr.rows; row++) {
    for (let e = csr.ptr[row] as number; e < (csr.ptr[row + 1] as number); e++) {
      const size = Math.max(modulusAbove(csr, e), radius === undefined ? 0 : (radius[e] as number));
      if (size <= largest) continue;
      const col = csr.col[e] as number;
      const message =
        `entry (${row}, ${col}) of ${name}, counted from 0, is of size ${size.toPrecision(3)}, above ${largest}, the largest ` +
        "whose products are sure to be finite; give the operator in a larger unit";
      throw new GoodBasisError("not-finite", message, { operator: name, row, col, size, largest });
    }
  }
  return operator;
}

function sameSize(name: string, operator: Operator, n: number): Operator {
  if (operator.n === n) return operator;
  throw new GoodBasisError(
    "shape",
    `${name} is ${operator.n} × ${operator.n} but H0 is ${n} × ${n}; give every operator over the same kets`,
    { operator: name, expected: n, received: operator.n },
  );
}

function hermitian(name: string, operator: Operator): Operator {
  if (operator.isHermitian) return operator.hermitianPart();
  const worst = operator.hermitianDefect;
  throw new GoodBasisError(
    "not-hermitian",
    `${name} is not Hermitian: ‖${name} − ${name}†‖ = ${worst.size.toPrecision(6)} (Frobenius), worst at row ${worst.row}, ` +
      `column ${worst.col}, where the two elements differ by ${worst.value.toPrecision(6)}; ` +
      "correct the matrix, or pass (A + A†)/2 if the asymmetry is noise",
    { operator: name, size: worst.size, row: worst.row, column: worst.col, difference: worst.value },
  );
}

function readPerturbations(v: Problem["v"], n: number): NamedOperator[] {
  if (isMatrixInput(v)) return [{ name: "V", operator: readSingle(v, n) }];
  const entries = isObject(v) && !(v instanceof Map) ? Object.entries(v) : [];
  if (entries.length === 0) {
    const message = `no perturbation was given: v is ${shown(v)}; pass v: matrix, or v: { name: matrix }`;
    throw new GoodBasisError("option", message, {});
  }
  return entries.map(([name, input]) => {
    checkName("perturbation", name);
    if (name === "H0" || MATRIX_FIELDS.includes(name)) {
      const why = name === "H0" ? "" : ", which is a field of a matrix";
      throw new GoodBasisError("name", `a perturbation may not be called "${name}"${why}; rename it`, { name });
    }
    return { name, operator: hermitian(name, sameSize(name, read(name, input, LARGEST_ENERGY), n)) };
  });
}

/** V given as one matrix; what is wrong with it may be that its fields were meant as names. */
function readSingle(v: MatrixInput, n: number): Operator {
  try {
    return hermitian("V", sameSize("V", read("V", v, LARGEST_ENERGY), n));
  } catch (error) {
    const fields = v instanceof Operator || Array.isArray(v) ? [] : Object.keys(v);
    const field = fields.find((name) => MATRIX_FIELDS.includes(name));
    if (!(error instanceof GoodBasisError) || field === undefined) throw error;
    const hint = `v is read as one matrix, as it has the field "${field}"; if that is a perturbation's name, rename it`;
    throw new GoodBasisError(error.code, `${error.message} (${hint})`, error.details);
  }
}

function readCandidate(name: string, input: MatrixInput | Candidate, n: number): PreparedCandidate {
  const given: Candidate = isMatrixInput(input) ? { operator: input } : (input ?? { operator: input });
  if (isObject(given) && "operator" in given) requireKnown(`candidate ${name}`, given, CANDIDATE_FIELDS);
  let operator = sameSize(name, read(name, given.operator, LARGEST_CANDIDATE), n);
  const kind = operator.kind;
  if (kind === "general") {
    const size = operator.normalDefect;
    throw new GoodBasisError(
      "not-normal",
      `candidate ${name} is not normal: ‖[${name}, ${name}†]‖ = ${size.toPrecision(6)} (Frobenius); ` +
        "a candidate must be Hermitian, unitary or at least commute with its adjoint " +
        "(give Jz rather than J+; a ladder operator goes beside its label as `ladder`)",
      { operator: name, size },
    );
  }
  if (kind === "hermitian") operator = operator.hermitianPart();
  const ladderName = `${name}.ladder`;
  const ladder =
    given.ladder === undefined ? undefined : sameSize(ladderName, read(ladderName, given.ladder, LARGEST_CANDIDATE), n);
  return {
    name,
    operator,
    kind,
    adjoint: kind === "hermitian" ? operator : operator.adjoint(),
    label: checkDeclaration(name, given.label),
    ladder,
  };
}

function checkName(what: string, name: string): void {
  if (name === "__proto__") {
    throw new GoodBasisError("name", `a ${what} may not be called "__proto__"; rename it`, { name });
  }
  if (name.trim() === "") {
    throw new GoodBasisError("name", `a ${what} has an empty name; name it as its label should read`, { name });
  }
}

function checkKets(kets: readonly string[], n: number): readonly string[] {
  if (!Array.isArray(kets)) {
    throw new GoodBasisError("shape", `kets is ${shown(kets)}; give an array of ${n} names`, { expected: n });
  }
  if (kets.length !== n) {
    throw new GoodBasisError("shape", `kets lists ${kets.length} names but H0 is ${n} × ${n}; name every ket once`, {
      expected: n,
      received: kets.length,
    });
  }
  const seen = new Map<string, number>();
  [...kets].forEach((ket, i) => {
    if (typeof ket !== "string") {
      const message = `ket ${i} is ${shown(ket)}; give every name as text, such as "${i}"`;
      throw new GoodBasisError("name", message, { ket: i });
    }
    if (ket.trim() === "") {
      throw new GoodBasisError("name", `ket ${i} has an empty name; name every ket`, { ket: i });
    }
    const other = seen.get(ket);
    if (other !== undefined) {
      throw new GoodBasisError("name", `kets ${other} and ${i} are both called "${ket}"; names must differ`, {
        name: ket,
        first: other,
        second: i,
      });
    }
    seen.set(ket, i);
  });
  return [...kets];
}
