import { describe, expect, it } from 'vitest';
import { commandOf, keysOf, SHORTCUTS } from '../../renderer/bench/shortcuts';

describe('shortcuts', () => {
  const press = (key: string, extra: object = {}) => ({
    key,
    ctrlKey: false,
    metaKey: false,
    altKey: false,
    shiftKey: false,
    ...extra,
  });

  it('follow the system: Ctrl, or Cmd on macOS', () => {
    expect(commandOf(press('s', { ctrlKey: true }), false)).toBe('save');
    expect(commandOf(press('s', { metaKey: true }), true)).toBe('save');
    expect(commandOf(press('s', { ctrlKey: true }), true)).toBeNull();
    expect(commandOf(press('S', { ctrlKey: true, shiftKey: true }), false)).toBe('save-as');
    expect(commandOf(press('s'), false)).toBeNull();
  });

  it('reach every stage by Alt and a digit too', () => {
    expect(commandOf(press('3', { altKey: true }), false)).toBe('stage-3');
    expect(commandOf(press('6', { altKey: true }), false)).toBeNull();
  });

  it('are told by the keys of the system, and no two are the same', () => {
    const save = SHORTCUTS.find(({ command }) => command === 'save-as')!;
    expect(keysOf(save, false)).toBe('Ctrl Shift S');
    expect(keysOf(save, true)).toBe('\u21e7\u2318S');
    expect(new Set(SHORTCUTS.map((one) => keysOf(one, false))).size).toBe(SHORTCUTS.length);
  });
});
