/**
 * Where every row went: `read = cut + rejected + unmatched + tallied`, and the rejected ones by reason.
 * `unmatched` is 0 unless the study counts rows without a true value.
 */
export interface Ledger {
  read: number;
  cut: number;
  rejected: number;
  unmatched: number;
  tallied: number;
  reasons: Record<string, number>;
  /** Cells whose weight is not positive though they have events, and the weight so set aside. */
  clamped: { cells: number; weight: number };
}

export function emptyLedger(): Ledger {
  return { read: 0, cut: 0, rejected: 0, unmatched: 0, tallied: 0, reasons: {}, clamped: { cells: 0, weight: 0 } };
}

/** Adds the rows of `other` to `ledger`; clamped cells are no rows and are found on the whole tally only. */
export function addLedger(ledger: Ledger, other: Ledger): void {
  ledger.read += other.read;
  ledger.cut += other.cut;
  ledger.rejected += other.rejected;
  ledger.unmatched += other.unmatched;
  ledger.tallied += other.tallied;
  for (const [reason, rows] of Object.entries(other.reasons)) {
    ledger.reasons[reason] = (ledger.reasons[reason] ?? 0) + rows;
  }
}

/** The law of the ledger: every row read is in exactly one place. */
export function ledgerBalances(ledger: Ledger): boolean {
  const rejected = Object.values(ledger.reasons).reduce((a, b) => a + b, 0);
  const placed = ledger.cut + ledger.rejected + ledger.unmatched + ledger.tallied;
  return ledger.read === placed && ledger.rejected === rejected;
}
