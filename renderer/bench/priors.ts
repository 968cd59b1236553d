import type { Prior } from '../../src/study/study';

export type PriorKind = 'jeffreys' | 'flat' | 'perks' | 'neighbours' | 'count' | 'total';

export const PRIORS: readonly { kind: PriorKind; title: string }[] = [
  { kind: 'jeffreys', title: 'Jeffreys, 1/2 each' },
  { kind: 'flat', title: 'Flat, 1 each' },
  { kind: 'perks', title: 'Perks, 1 shared out' },
  { kind: 'neighbours', title: 'Neighbour columns' },
  { kind: 'count', title: 'Own count each' },
  { kind: 'total', title: 'Own total shared out' },
];

export function priorKind(prior: Prior): PriorKind {
  if ('neighbours' in prior) return 'neighbours';
  if ('pseudoTotal' in prior) return prior.pseudoTotal === 1 ? 'perks' : 'total';
  if (prior.pseudoCount === 0.5) return 'jeffreys';
  return prior.pseudoCount === 1 ? 'flat' : 'count';
}

/** Where an own number begins: beside the named ones, so that choosing "own" shows its field. */
const OWN = { count: 0.1, total: 2 };

export function priorOf(kind: PriorKind, now: Prior): Prior {
  switch (kind) {
    case 'jeffreys':
      return { pseudoCount: 0.5 };
    case 'flat':
      return { pseudoCount: 1 };
    case 'perks':
      return { pseudoTotal: 1 };
    case 'neighbours':
      return { neighbours: {} };
    case 'count':
      return { pseudoCount: priorKind(now) === 'count' && 'pseudoCount' in now ? now.pseudoCount : OWN.count };
    case 'total':
      return { pseudoTotal: priorKind(now) === 'total' && 'pseudoTotal' in now ? now.pseudoTotal : OWN.total };
  }
}

/** The prior in words. */
export function priorTitle(prior: Prior): string {
  if ('neighbours' in prior) return 'from neighbour columns';
  if ('pseudoTotal' in prior) return `pseudo-count ${prior.pseudoTotal} shared over the outcomes`;
  return `pseudo-count ${prior.pseudoCount} for each outcome`;
}
