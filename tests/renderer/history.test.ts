import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { begin, MOST_STEPS, record, redo, settle, undo } from '../../renderer/bench/history';

describe('undo and redo', () => {
  it('goes back to every document that was recorded, and forward again', () => {
    let history = begin({ bins: 10 });
    history = record(history, { bins: 20 });
    history = record(history, { bins: 40 });
    expect(undo(history).present).toEqual({ bins: 20 });
    expect(undo(undo(history)).present).toEqual({ bins: 10 });
    expect(redo(undo(history)).present).toEqual({ bins: 40 });
  });

  it('stays where it is at both ends', () => {
    const history = begin('a');
    expect(undo(history)).toBe(history);
    expect(redo(history)).toBe(history);
  });

  it('forgets the undone future once something new is recorded', () => {
    const history = record(undo(record(begin('a'), 'b')), 'c');
    expect(redo(history).present).toBe('c');
    expect(undo(history).present).toBe('a');
  });

  it('joins the steps of one drag into one, and starts another when it has settled', () => {
    let history = begin(0);
    for (const edge of [1, 2, 3]) history = record(history, edge, 'edge 4');
    expect(undo(history).present).toBe(0);
    history = record(settle(history), 4, 'edge 4');
    expect(undo(history).present).toBe(3);
  });

  it('does not join an edit with the one that was undone', () => {
    const history = record(undo(record(begin(0), 1, 'edge')), 2, 'edge');
    expect(undo(history).present).toBe(0);
  });

  it('records nothing where the document says the same', () => {
    const history = begin({ a: [1, 2] });
    expect(record(history, { a: [1, 2] })).toBe(history);
  });

  it(`keeps ${MOST_STEPS} steps`, () => {
    let history = begin(0);
    for (let i = 1; i <= MOST_STEPS + 5; i++) history = record(history, i);
    for (let i = 0; i < MOST_STEPS + 5; i++) history = undo(history);
    expect(history.present).toBe(5);
  });

  it('returns to the start by as many undos as there were steps, whatever was done', () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 0, max: 3 }), { maxLength: 40 }), (documents) => {
        let history = begin(-1);
        for (const document of documents) history = record(history, document);
        const steps = history.past.length;
        for (let i = 0; i < steps; i++) history = undo(history);
        expect(history.present).toBe(-1);
        for (let i = 0; i < steps; i++) history = redo(history);
        expect(history.present).toBe(documents.at(-1) ?? -1);
      }),
    );
  });
});
