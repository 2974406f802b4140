export { type Audit, type AuditOptions, auditCommutators, type CandidateFinding } from "./audit/audit.js";
export type { CommutatorFinding, CommutatorVerdict, OffendingElement } from "./audit/commutators.js";
export type { LabelDeclaration } from "./audit/label-family.js";
export type { Candidate, Problem } from "./audit/problem.js";
export type {
  Certificate,
  CertifiedBound,
  CertifiedCommutator,
  CertifiedCoupling,
  CertifiedLevel,
  CertifiedNode,
  CertifiedOperator,
  CertifiedState,
  CertifiedVector,
} from "./certify/certificate-format.js";
export type { BasisColumns, MatrixLike, RealColumns } from "./certify/columns.js";
export type { CouplingBound, LevelCouplings, NodeEvidence, PairElement } from "./certify/couplings.js";
export { type FindOptions, findGoodBasis } from "./certify/find.js";
export type {
  BasisState,
  Coupling,
  LevelResult,
  Question,
  SetReport,
  StateVector,
  Study,
} from "./certify/findings.js";
export type { GoodBasis } from "./certify/good-basis.js";
export type { GuardFinding, GuardOptions, GuardSetting, LevelGuard, SectorGuard } from "./certify/guard.js";
export type { GoodOutcome, NotGoodOutcome, Outcome, UndecidedOutcome } from "./certify/outcome.js";
export { type RecheckFinding, type RecheckReport, type RecheckTerms, recheck } from "./certify/recheck.js";
export type { Repair } from "./certify/repair.js";
export type { SafeOrders } from "./certify/safe-orders.js";
export type { Progress } from "./certify/study.js";
export {
  type Checked,
  type ClaimedLabel,
  type ColumnCoupling,
  type ColumnFinding,
  type ValidatedLevel,
  type ValidateOptions,
  type Validation,
  validateBasis,
} from "./certify/validate.js";
export type { QuestionCode, Shift, Verdict } from "./certify/verdict.js";
export type { NearbyModel, SectorEvidence, SeparatorEvidence, WholeEvidence } from "./certify/whole.js";
export { type ErrorCode, GoodBasisError } from "./errors.js";
export { type Annihilation, annihilates, projectorTraces, spectralPart } from "./exact/annihilate.js";
export type { ExactBudget } from "./exact/budget.js";
export { characteristicPolynomial, minimalPolynomial } from "./exact/characteristic.js";
export { exactEigenspace } from "./exact/eigenspace.js";
export { exactKernel, exactRank } from "./exact/elimination.js";
export { type FieldRoots, fieldRoots } from "./exact/field-roots.js";
export type { FloatingRows } from "./exact/floating.js";
export { type Orthogonalised, orthogonalise } from "./exact/gram-schmidt.js";
export { type ExactElement, ExactOperator } from "./exact/operator.js";
export { fixExactPhase } from "./exact/phase.js";
export type { Polynomial } from "./exact/polynomial.js";
export type { SurdForm, SurdTextOptions } from "./exact/print.js";
export { type Proposal, type RecogniseOptions, recognise } from "./exact/recognise.js";
export {
  type NoOperatorProposal,
  type OperatorProposal,
  recogniseMatrix,
  type UnknownEntry,
} from "./exact/recognise-matrix.js";
export { type Representation, represent } from "./exact/represent.js";
export { exactRootOfUnity } from "./exact/root-of-unity.js";
export type { ExactTriplet } from "./exact/rows.js";
export { Surd, type SurdInput } from "./exact/surd.js";
export type { SurdTerm } from "./exact/terms.js";
export { ExactVector } from "./exact/vector.js";
export { type AngularMomentum, angularMomentum } from "./models/angular-momentum.js";
export { type Bond, hopping } from "./models/lattice.js";
export { type Oscillator, oscillator } from "./models/oscillator.js";
export { ketPermutation, reflection, sitePermutation, translation } from "./models/permutations.js";
export { type ProductSpace, productSpace } from "./models/product-space.js";
export { type SpinChain, spinChain } from "./models/spin-chain.js";
export type { Complex, Scalar } from "./numerics/complex.js";
export type { Csr } from "./numerics/csr.js";
export type { Dense } from "./numerics/dense.js";
export type { ExactData, ExactEntry } from "./operator/exact-input.js";
export type { MatrixInput } from "./operator/input.js";
export { type MatrixMarketOptions, readMatrixMarket, toMatrixMarket } from "./operator/matrix-market.js";
export { Operator, type OperatorOptions } from "./operator/operator.js";
export type { Radius } from "./operator/radius.js";
export type { MatrixData, RealEntries, Triplet, Uncertainty } from "./operator/read.js";
export { type ProposedEntry, type ProposedOperator, recogniseOperator } from "./operator/recognise.js";
export type { HermitianDefect } from "./operator/structure.js";
export type { Bounded } from "./perturb/bounded.js";
export { type Perturbation, type PerturbedState, type PerturbOptions, perturb } from "./perturb/perturb.js";
export type { ProblemOptions } from "./problem/problem-file.js";
export { type ReadProblem, type ReadProblemOptions, readProblem } from "./problem/read.js";
export { type ReadBasis, type ReadBasisOptions, readBasis } from "./problem/read-basis.js";
export { type WriteProblemOptions, writeProblem } from "./problem/write.js";
export type { LabelStatus, StateLabel } from "./refine/label.js";
export type { LevelChoice } from "./refine/levels.js";
export type { Depth } from "./refine/resolve.js";
export type { NodeKind, PathStep, TreeNode } from "./refine/tree.js";
export type { BasisColumn } from "./report/basis-columns.js";
export { type BasisTableOptions, basisTable } from "./report/basis-table.js";
export { type FormatAuditOptions, formatAudit } from "./report/format-audit.js";
export { type FormatOutcomeOptions, formatOutcome } from "./report/format-outcome.js";
export { formatRecheck } from "./report/format-recheck.js";
export { type FormatTableOptions, formatTable, type TableFormat } from "./report/format-table.js";
export type { Cell, Expansion, ExpansionTerm, Table, TableColumn, TableRow } from "./report/table.js";
export { VERSION } from "./version.js";
