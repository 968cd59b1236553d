import { describe, expect, it } from 'vitest';
import { priorKind, priorOf, PRIORS } from '../../renderer/bench/priors';

describe('priors', () => {
  it('are told apart by what they say, and each kind makes a prior of its kind', () => {
    for (const { kind } of PRIORS) expect(priorKind(priorOf(kind, { pseudoCount: 0.5 }))).toBe(kind);
    expect(priorKind({ pseudoCount: 0.3 })).toBe('count');
  });

  it('keep an own number', () => {
    expect(priorOf('count', { pseudoCount: 0.3 })).toEqual({ pseudoCount: 0.3 });
  });
});
