/** The door of the record room: canonical form, digests, sealed plans, the ledger, and the state of each comparison. */
export {
  type Audit,
  auditLedger,
  type Deviation,
  deviationsOf,
  type EmbeddedRecord,
  embedRecord,
  isEmbeddedRecord,
} from "./audit.ts";
export { canonicalJson, digestOf, digestOfValue } from "./digest.ts";
export {
  appendEntry,
  chainProblems,
  emptyLedger,
  headOf,
  type Ledger,
  type LedgerEntry,
  type LedgerEvent,
  type LedgerFacts,
  type LedgerProblem,
  readLedger,
} from "./ledger.ts";
export {
  PlanError,
  type PlanContent,
  type PlannedFamily,
  planPath,
  planText,
  readPlan,
  sameCommitment,
  type SealedPlan,
  sealPlan,
} from "./plan.ts";
export { type ComparisonState, doneAfterResults, firstRead, firstResultSeen, sameAct, stateOf } from "./state.ts";
