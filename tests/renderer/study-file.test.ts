import { describe, expect, it } from 'vitest';
import { faultAt } from '../../renderer/bench/study-file.svelte';

describe('faults in place', () => {
  const fault = { where: 'cuts[1].value', what: 'x', remedy: 'y' };
  it('stand at the path they name and at those around it', () => {
    expect(faultAt(fault, 'cuts[1]')).toBe(fault);
    expect(faultAt(fault, 'cuts[1].value')).toBe(fault);
    expect(faultAt(fault, 'cuts[10]')).toBeNull();
    expect(faultAt({ ...fault, where: 'cuts[10]' }, 'cuts[1]')).toBeNull();
    expect(faultAt(null, 'cuts')).toBeNull();
  });
});
