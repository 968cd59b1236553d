import type { Ledger } from '../../../src/tally/ledger';

export interface Flow {
  name: 'cut' | 'rejected' | 'unmatched' | 'tallied';
  rows: number;
  /** Where it leaves the bar of all rows, and where it arrives, in pixels. */
  above: { from: number; to: number };
  below: { from: number; to: number };
  text: { x: number; anchor: 'start' | 'middle' | 'end' };
}

/** Between two flows at their arrival. */
const APART = 12;
/** A flow of even one row is seen. */
const LEAST = 2;

/**
 * The ways out of the bar of rows read: together exactly as wide as it, apart where they arrive. What is not zero has
 * at least `LEAST` pixels, taken from the widest.
 */
export function flowsOf(ledger: Ledger, unmatched: boolean, width: number): Flow[] {
  const names = (['cut', 'rejected', 'unmatched', 'tallied'] as const).filter(
    (name) => name !== 'unmatched' || unmatched || ledger.unmatched > 0,
  );
  const above = shared(
    names.map((name) => ledger[name]),
    width,
  );
  const below = shared(
    names.map((name) => ledger[name]),
    width - APART * (names.length - 1),
  );
  let at = 0;
  let to = 0;
  return names.map((name, i) => {
    const flow = { above: { from: at, to: at + above[i]! }, below: { from: to, to: to + below[i]! } };
    at += above[i]!;
    to += below[i]! + APART;
    return { name, rows: ledger[name], ...flow, text: textAt(i, names.length, width) };
  });
}

/** Widths by share that sum to `width`. */
export function shared(rows: readonly number[], width: number): number[] {
  const total = rows.reduce((a, b) => a + b, 0);
  if (total === 0) return rows.map(() => 0);
  const widths = rows.map((n) => (n === 0 ? 0 : Math.max(LEAST, (n / total) * width)));
  const widest = widths.indexOf(Math.max(...widths));
  widths[widest] = widths[widest]! + width - widths.reduce((a, b) => a + b, 0);
  return widths;
}

/** The words stand in as many equal places as there are flows: small flows lie too close for their own. */
function textAt(i: number, flows: number, width: number): Flow['text'] {
  if (i === 0) return { x: 0, anchor: 'start' };
  if (i === flows - 1) return { x: width, anchor: 'end' };
  return { x: (i / (flows - 1)) * width, anchor: 'middle' };
}

export function reasonsOf(ledger: Ledger): { reason: string; rows: number }[] {
  const reasons = Object.entries(ledger.reasons).map(([reason, rows]) => ({ reason, rows }));
  return reasons.filter(({ rows }) => rows > 0).sort((a, b) => b.rows - a.rows);
}
