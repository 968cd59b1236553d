import { describe, expect, it } from 'vitest';
import { fileStem } from '../../renderer/bench/choosing.svelte';
import { snippet } from '../../renderer/words/snippets';

describe('names of files', () => {
  it('are plain on every system', () => {
    expect(fileStem('Tagged photons, spring: #3')).toBe('tagged-photons-spring-3');
    expect(fileStem('***')).toBe('entasis');
  });

  it('stand quoted in the lines that load a bundle', () => {
    for (const language of ['Python', 'R', 'Julia'] as const) {
      expect(snippet(language, 'C:\\data\\a "b".bundle')).toContain('"C:\\\\data\\\\a \\"b\\".bundle"');
    }
  });
});
