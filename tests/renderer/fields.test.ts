import { describe, expect, it } from 'vitest';
import { mergeFields, roleOf, withRole } from '../../renderer/bench/fields';
import type { FileInspection } from '../../main/bridge';

describe('fields and roles', () => {
  const inspection = (missing: number, least: number, labels: string[] | null) =>
    ({
      facts: {
        rows: 10,
        columns: [{ name: 'e', type: 'number', missing, nonFinite: 0, least, greatest: least + 1, labels }],
      },
      sketches: [{ name: 'e', histogram: null, labels: null }],
    }) as unknown as FileInspection;

  it('are summed over the files', () => {
    const [field] = mergeFields([inspection(1, 5, ['a']), inspection(2, -3, ['b'])], null);
    expect(field).toMatchObject({ missing: 3, rows: 20, files: 2, least: -3, greatest: 6, labels: ['a', 'b'] });
  });

  it('give a role to one field and a field one role', () => {
    const roles = { true: 'a', reconstructed: 'b', weight: 'c' };
    expect(withRole(roles, 'b', 'true')).toEqual({ true: 'b', reconstructed: '', weight: 'c' });
    expect(withRole(roles, 'c', null)).toEqual({ true: 'a', reconstructed: 'b' });
    expect(roleOf(roles, 'c')).toBe('weight');
    expect(roleOf(roles, 'x')).toBeNull();
  });
});
