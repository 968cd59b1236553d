import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  addEdge,
  CLOSEST,
  edgesOf,
  handPlaced,
  moveEdge,
  nearestEdge,
  parseEdges,
  removeEdge,
  withEdges,
  withEvenBins,
} from '../../renderer/bench/edges';

describe('edges moved by hand', () => {
  it('stay in order however far and however long they are dragged', () => {
    const moves = fc.array(fc.tuple(fc.nat(4), fc.double({ min: -1e9, max: 1e9, noNaN: true })), { maxLength: 40 });
    fc.assert(
      fc.property(moves, (list) => {
        let edges = [0, 1, 2, 4, 8];
        for (const [i, to] of list) edges = moveEdge(edges, i, to, 'linear');
        for (let n = 1; n < edges.length; n++) expect(edges[n]!).toBeGreaterThan(edges[n - 1]!);
      }),
    );
  });

  it('do not creep into a neighbour while they are held against it', () => {
    let edges = [0, 1, 2];
    for (let i = 0; i < 1000; i++) edges = moveEdge(edges, 1, 5, 'linear');
    expect(edges[1]).toBe(2 - 2 * CLOSEST);
  });

  it(`stop at ${CLOSEST} of the bins beside them, and pass freely before it`, () => {
    expect(moveEdge([0, 1, 2], 1, 1.95, 'linear')[1]).toBe(1.95);
    expect(moveEdge([0, 1, 2], 1, 1.97, 'linear')[1]).toBe(2 - 2 * CLOSEST);
    expect(moveEdge([0, 1, 2], 1, 0.01, 'linear')[1]).toBe(2 * CLOSEST);
    expect(moveEdge([0, 1, 2], 0, 3, 'linear')[0]).toBe(1 - CLOSEST);
    expect(moveEdge([0, 1, 2], 2, -3, 'linear')[2]).toBe(1 + CLOSEST);
  });

  it('never reach zero on a log axis', () => {
    expect(moveEdge([1, 10, 100], 0, -3, 'log')[0]).toBe(1);
    expect(moveEdge([1, 10, 100], 0, 0.5, 'log')[0]).toBe(0.5);
  });

  it('land on numbers as round as a pixel is wide', () => {
    expect(handPlaced(20.123456, 0.08)).toBe(20.12);
    expect(handPlaced(20.123456, 0.2)).toBe(20.1);
    expect(handPlaced(1234.5, 30)).toBe(1230);
    expect(handPlaced(0.1 + 0.2, 0.01)).toBe(0.3);
  });

  it('are added once, in their place, and taken out down to two', () => {
    expect(addEdge([0, 2], 1)).toEqual([0, 1, 2]);
    expect(addEdge([0, 2], 2)).toEqual([0, 2]);
    expect(removeEdge([0, 1, 2], 1)).toEqual([0, 2]);
    expect(removeEdge([0, 2], 0)).toEqual([0, 2]);
  });

  it('are found by the nearest on the screen', () => {
    expect(nearestEdge([1, 10, 100], Math.log10, 1.4)).toBe(1);
    expect(nearestEdge([1, 10, 100], Math.log10, 1.6)).toBe(2);
  });
});

describe('edges typed or pasted', () => {
  it('are read apart by spaces, commas, semicolons and lines, with brackets and a true minus', () => {
    expect(parseEdges('[\u22121, 0; 2.5\n1e1]')).toEqual({ edges: [-1, 0, 2.5, 10] });
  });

  it('name the first text that is no number', () => {
    expect(parseEdges('0, 1, two, 3')).toEqual({ bad: 'two' });
    expect(parseEdges('0, Infinity')).toEqual({ bad: 'Infinity' });
    expect(parseEdges('')).toEqual({ edges: [] });
  });
});

describe('kinds of an axis', () => {
  const even = { label: 'E', unit: 'MeV', from: 0, to: 10, bins: 4, spacing: 'linear' as const };

  it('keep label, unit and scale when even bins become edges and back', () => {
    const edges = withEdges(even, edgesOf(even));
    expect(edges).toEqual({ label: 'E', unit: 'MeV', edges: [0, 2.5, 5, 7.5, 10], spacing: 'linear' });
    expect(withEvenBins(edges)).toEqual(even);
  });

  it('have no edges while their numbers make none', () => {
    expect(edgesOf({ ...even, to: 0 })).toEqual([]);
    expect(edgesOf({ ...even, spacing: 'log' })).toEqual([]);
    expect(edgesOf({ label: '', tags: ['a'] })).toEqual([]);
  });
});
