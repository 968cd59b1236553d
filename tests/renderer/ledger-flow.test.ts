import { describe, expect, it } from 'vitest';
import { flowsOf, reasonsOf, shared } from '../../renderer/stages/events/ledger-flow';
import { emptyLedger } from '../../src/tally/ledger';

describe('the ledger as a picture', () => {
  const ledger = { ...emptyLedger(), read: 1000, cut: 100, rejected: 1, tallied: 899, reasons: { a: 1, b: 0 } };

  it('balances: the ways out are together exactly as wide as the bar of rows read', () => {
    const flows = flowsOf(ledger, false, 400);
    expect(flows.map(({ name }) => name)).toEqual(['cut', 'rejected', 'tallied']);
    expect(flows.at(-1)!.above.to).toBeCloseTo(400, 9);
    expect(flows.at(-1)!.below.to).toBeCloseTo(400, 9);
    expect(flows[0]!.above.to).toBeCloseTo(40, 9);
  });

  it('shows even one row, and nothing for none', () => {
    expect(shared([1e6, 1], 300)[1]).toBe(2);
    expect(shared([1e6, 0], 300)).toEqual([300, 0]);
    expect(shared([0, 0], 300)).toEqual([0, 0]);
  });

  it('counts unmatched rows where the study does', () => {
    expect(flowsOf(ledger, true, 400).map(({ name }) => name)).toContain('unmatched');
    expect(flowsOf({ ...ledger, unmatched: 3 }, false, 400).map(({ name }) => name)).toContain('unmatched');
  });

  it('lists reasons that happened', () => {
    expect(reasonsOf(ledger)).toEqual([{ reason: 'a', rows: 1 }]);
  });
});
