/**
 * Entasis as a library: `import { ... } from 'entasis'`. The way of the data, in the order of use:
 *
 * 1. A study says what to do: `parseStudy`.
 * 2. Events become a tally: `tallyTable` (arrays in memory), `tallyFiles` (the study's files); `readerFor` reads the files
 *    alone.
 * 3. A tally becomes a posterior, a summary and an audit: `analyse`.
 * 4. The posterior gives replicas of the response matrix: `drawReplicas`.
 * 5. A bundle that the program has written is opened and handed on: `openBundle`, `replicaBlocks`, `formatOf`.
 *
 * Arrays are plain `Float64Array`s in C order, `[column, outcome]` or `[replica, column, outcome]`. Bins are half-open,
 * `[lo, hi)`, the last one too. A fault that the caller's input causes is an `InputError` with one clear line. What is
 * exported here is kept stable; other modules of the package are not.
 *
 * The uncertainty given is the statistical uncertainty of the calibration only; systematic effects are yours to add.
 */

// 1. Studies and axes
export { Cancelled, InputError } from './study/input-error';
export { MOST_BINS, MOST_REPLICAS, parseStudy, parseStudyText, resolveAxis, STUDY_SCHEMA } from './study/study';
export type { AxisDocument, Cut, Limits, Prior, Reference, Study, StudyInput } from './study/study';
export { studyFingerprint } from './study/fingerprint';
export { ABOVE, BELOW, binCount, binRange, columnNames, LOST, outcomeNames } from './study/axis';
export type { Axis, NumericAxis, TagAxis } from './study/axis';

// 2. Events and tallies
export { inspectFile } from './events/inspect';
export { proposeStudy } from './events/propose-study';
export type { ProposedStudy, Role } from './events/propose-study';
export { readerFor } from './events/formats';
export type { Batch, ColumnFacts, FileFacts, Need, Reader, Reject, Unit } from './events/batch';
export { tallyTable, type EventColumn } from './tally/tally-table';
export { tallyFiles, type TallyFilesOptions } from './tally/tally-files';
export { ledgerBalances, type Ledger } from './tally/ledger';
export type { Cells, Duplicates, Tally } from './tally/tally';

// 3. Posterior and audit
export { analyse, type Analysis } from './handover/analyse';
export { columnOf, effectiveEntries, posteriorOf, type Posterior } from './posterior/posterior';
export { priorOf, type PriorCounts } from './posterior/prior';
export { summarise, type Summary } from './posterior/summary';
export { marginalOf, momentsOf, type Marginal } from './posterior/marginal';
export { equalTailed, upperLimit, type Interval } from './posterior/intervals';
export { clopperPearson } from './posterior/clopper-pearson';
export { matchedDirichlet } from './posterior/matched-dirichlet';
export { auditOf, type Audit, type AuditInput } from './audit/audit';
export { FLAG_IDS, type Flag, type FlagId, type FlagState } from './audit/flag';
export { isAbsent, type Measure } from './audit/measure';
export { referenceOf, type ReferenceSpectrum } from './audit/reference';

// 4. Replicas
export { BLOCK, type SamplerParameters } from './ensemble/draw';
export { drawReplicas, type DrawnReplicas } from './ensemble/replicas';
export { breaksOf, sequentialBetas, sharesOf, type SequentialBetas } from './ensemble/sequential';

// 5. Bundles and hand-over
export { openBundle, readArray, replicaBlocks, type Bundle, type ReplicaBlock } from './handover/open-bundle';
export { bundleTally } from './handover/bundle-tally';
export { reportHtml } from './handover/report/report';
export { BUNDLE_SCHEMA, parseManifest, type Manifest } from './handover/manifest';
export { FORMATS, formatOf, type FormatId, type HandoverFormat } from './handover/formats';
export type { HandoverOptions, ReplicaRange } from './handover/handover-options';
export type { WrittenFile } from './handover/whole-file';
export { readNpy, writeNpy, type NpyArray, type NpyType } from './handover/npy';
export { CAUTIONS } from './handover/cautions';
