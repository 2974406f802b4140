import type { CandidateFinding } from "../audit/audit.js";
import type { CommutatorFinding, OffendingElement } from "../audit/commutators.js";
import { visible } from "./characters.js";
import { boundText, numberText } from "./numbers.js";

/** "3 levels", "1 level". */
export function counted(count: number, one: string, many = `${one}s`): string {
  return `${count} ${count === 1 ? one : many}`;
}

/** A number with the unit behind it, if there is one. */
export function withUnit(text: string, unit: string): string {
  return unit === "" ? text : `${text} ${unit}`;
}

/** A commutator in a cell: its verdict and the number that it rests on. */
export function commutatorText(finding: CommutatorFinding): string {
  switch (finding.verdict) {
    case "commutes":
      return finding.bound === 0 ? "0 exactly" : `0 within ${boundText(finding.bound)}`;
    case "broken":
      return `broken, ${numberText(finding.norm)}`;
    case "undecided":
      return `undecided, ≤ ${boundText(finding.bound)}`;
    default:
      return finding.verdict satisfies never;
  }
}

/** What becomes of a candidate. */
export function useText(candidate: CandidateFinding): string {
  if (candidate.conserved) return "conserved";
  return candidate.descriptive ? "dropped, names levels only" : "dropped";
}

/** Why a candidate was dropped, one sentence for each commutator that does not vanish. */
export function reasons(candidate: CandidateFinding): string[] {
  return [candidate.withH0, ...candidate.withPerturbations]
    .filter((finding) => finding.verdict !== "commutes")
    .map((finding) => commutatorSentence(finding));
}

/** A commutator that does not vanish, or may not, in words and with its largest elements. */
export function commutatorSentence(finding: CommutatorFinding): string {
  const { left, right } = finding;
  const elements = withoutMirrors(finding.largest).map(
    ({ rowKet, columnKet, size }) => `${numberText(size, 4)} at\u00a0⟨${visible(rowKet)}|…|${visible(columnKet)}⟩`,
  );
  const where = elements.length === 0 ? "" : `; largest elements ${elements.join(", ")}`;
  const size = `‖[${left}, ${right}]‖\u00a0=\u00a0${numberText(finding.norm)} (Frobenius)`;
  if (finding.verdict === "broken") {
    const edge = finding.edge
      ? " Only the last kets are concerned, a likely edge of a truncated space: build its matrix elements exactly, or enlarge it."
      : "";
    return `${left} does not commute with ${right}: ${size}${where}.${edge}`;
  }
  return (
    `Whether ${left} commutes with ${right} is undecided: ${size}, bound ${boundText(finding.bound)} above the threshold ` +
    `${numberText(finding.threshold, 2)}${where}. Smaller entry uncertainties or a coarser resolution would decide it.`
  );
}

/** Of an element and its mirror image with the same modulus only the first is worth saying. */
function withoutMirrors(elements: readonly OffendingElement[]): readonly OffendingElement[] {
  return elements.filter(
    (element, k) =>
      !elements
        .slice(0, k)
        .some(
          ({ row, column, size }) =>
            row === element.column && column === element.row && Math.abs(size - element.size) <= 1e-9 * size,
        ),
  );
}

/** Exponents that came inside a message with the trade's minus sign. */
export function typesetMessage(message: string): string {
  return message.replace(/(\de)-(?=\d)/g, "$1−").replace(/(\de)\+(?=\d)/g, "$1");
}
