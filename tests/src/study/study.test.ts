import { describe, expect, it } from 'vitest';
import { parseStudy, parseStudyText, resolveAxis, type StudyInput } from '../../../src/study/study';

const plain = (): StudyInput => ({
  schema: 'entasis.study/1',
  events: { files: ['a.csv'] },
  roles: { true: 't', reconstructed: 'r' },
  axes: {
    true: { label: 'Energy', unit: 'MeV', from: 0, to: 10, bins: 5, spacing: 'linear' },
    reconstructed: { label: 'Energy', unit: 'MeV', edges: [0, 1, 5, 10] },
  },
});

/** A study with one thing changed, by a function that may write anything. */
const changed = (change: (study: Record<string, any>) => void): unknown => {
  const study = structuredClone(plain()) as Record<string, any>;
  change(study);
  return study;
};

describe('a study document', () => {
  it('is filled with every default', () => {
    const study = parseStudy(plain());
    expect(study.lost).toBe('missing');
    expect(study.prior).toEqual({ pseudoCount: 0.5 });
    expect(study.credibility).toBe(0.95);
    expect(study.limits.thin).toBe(100);
    expect(study.limits['spill-above']).toBe(0.05);
    expect(study.ensemble).toEqual({ replicas: 1000, seed: 1 });
  });

  it('resolves to itself: a resolved study is a study', () => {
    const study = parseStudy(plain());
    expect(parseStudy(JSON.parse(JSON.stringify(study)))).toEqual(study);
  });

  const faults: [string, (study: Record<string, any>) => void, RegExp][] = [
    ['an unknown key', (s) => (s['colour'] = 1), /^s: colour: unknown key/],
    [
      'an unknown key deep inside',
      (s) => (s['ensemble'] = { replicas: 1, speed: 2 }),
      /^s: ensemble\.speed: unknown key/,
    ],
    ['an unknown key of an axis', (s) => (s['axes'].true.width = 2), /^s: axes\.true\.width: unknown key/],
    ['another schema', (s) => (s['schema'] = 'entasis.study/2'), /^s: schema: /],
    ['no files', (s) => (s['events'].files = []), /^s: events\.files: /],
    ['a missing role', (s) => delete s['roles'].true, /^s: roles\.true: /],
    ['negative replicas', (s) => (s['ensemble'] = { replicas: -5 }), /^s: ensemble\.replicas: /],
    ['a credibility of 1', (s) => (s['credibility'] = 1), /^s: credibility: /],
    [
      'unsorted edges',
      (s) => (s['axes'].reconstructed.edges = [0, 5, 2]),
      /^s: axes\.reconstructed\.edges\[2\]: edge 2 is below/,
    ],
    [
      'repeated edges',
      (s) => (s['axes'].reconstructed.edges = [0, 5, 5]),
      /^s: axes\.reconstructed\.edges\[2\]: edge 5 repeats/,
    ],
    [
      'an edge that is no number',
      (s) => (s['axes'].reconstructed.edges = [0, 'x']),
      /^s: axes\.reconstructed\.edges\[1\]: /,
    ],
    ['bins below 1', (s) => (s['axes'].true.bins = 0), /^s: axes\.true\.bins: /],
    ['to not above from', (s) => (s['axes'].true.to = -1), /^s: axes\.true\.to: /],
    ['a log axis from 0', (s) => (s['axes'].true.spacing = 'log'), /^s: axes\.true\.from: 0 on a log axis/],
    ['bins too narrow for a number', (s) => Object.assign(s['axes'].true, { from: 1e16, to: 1e16 + 2 }), /narrower/],
    [
      'a repeated tag',
      (s) => (s['axes'].true = { tags: ['a', 'b', 'a'] }),
      /^s: axes\.true\.tags\[2\]: tag "a" repeats/,
    ],
    ['a negative pseudo-count', (s) => (s['prior'] = { pseudoCount: -1 }), /^s: prior\.pseudoCount: /],
    ['two priors at once', (s) => (s['prior'] = { pseudoCount: 1, pseudoTotal: 1 }), /^s: prior/],
    ['"in" without a list', (s) => (s['cuts'] = [{ column: 'q', is: 'in', value: 1 }]), /^s: cuts\[0\]\.value: "in"/],
    [
      'a text compared by size',
      (s) => (s['cuts'] = [{ column: 'q', is: '<', value: 'x' }]),
      /^s: cuts\[0\]\.value: text/,
    ],
    ['an unknown comparison', (s) => (s['cuts'] = [{ column: 'q', is: '~', value: 1 }]), /^s: cuts\[0\]\.is: /],
    ['an unknown limit', (s) => (s['limits'] = { thick: 1 }), /^s: limits\.thick: unknown key/],
    ['a power law without index', (s) => (s['reference'] = { kind: 'powerLaw' }), /^s: reference\.index: missing/],
    ['a list instead of a study', (s) => Object.assign(s, { roles: [] }), /^s: roles/],
  ];
  it.each(faults)('refuses %s and names its JSON path', (_, change, message) => {
    expect(() => parseStudy(changed(change), 's')).toThrow(message);
  });

  it.each([[null], [1], ['x'], [[]]])('refuses %j as a whole', (value) => {
    expect(() => parseStudy(value, 's')).toThrow(/^s: /);
  });

  it('names the line where its text is no JSON', () => {
    expect(() => parseStudyText('{\n "schema": "entasis.study/1",\n oops }', 'x.study.json')).toThrow(
      /^x\.study\.json:3: not valid JSON/,
    );
  });
});

describe('an axis', () => {
  it('has the edges that numpy.linspace gives, to the bit', () => {
    // numpy 1.24.2: numpy.linspace(-0.3, 1.3, 8).tolist()
    const axis = resolveAxis({ label: '', unit: '', from: -0.3, to: 1.3, bins: 7, spacing: 'linear' });
    const numpy = [
      -0.3, -0.0714285714285714, 0.1571428571428572, 0.38571428571428573, 0.6142857142857143, 0.842857142857143,
      1.0714285714285714, 1.3,
    ];
    expect(axis.kind === 'numeric' && [...axis.edges]).toEqual(numpy);
  });

  it('meets both ends on a log scale and steps by a constant factor', () => {
    const axis = resolveAxis({ label: '', unit: '', from: 1, to: 1000, bins: 3, spacing: 'log' });
    if (axis.kind !== 'numeric') throw new Error('numeric');
    expect(axis.edges[0]).toBe(1);
    expect(axis.edges[1]).toBeCloseTo(10, 12);
    expect(axis.edges[3]).toBe(1000);
  });
});
