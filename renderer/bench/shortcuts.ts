import type { Command } from './bench.svelte';

export interface Shortcut {
  command: Command;
  /** Key as the keyboard event names it, in lower case. */
  key: string;
  shift: boolean;
  does: string;
}

/** Shortcuts with the system's main modifier: Ctrl, or Cmd on macOS. */
export const SHORTCUTS: readonly Shortcut[] = [
  { command: 'new', key: 'n', shift: false, does: 'Start a new study' },
  { command: 'open', key: 'o', shift: false, does: 'Open a study' },
  { command: 'open-events', key: 'o', shift: true, does: 'Add event files' },
  { command: 'save', key: 's', shift: false, does: 'Save the study' },
  { command: 'save-as', key: 's', shift: true, does: 'Save the study elsewhere' },
  { command: 'undo', key: 'z', shift: false, does: 'Undo the last edit' },
  { command: 'redo', key: 'z', shift: true, does: 'Redo the edit undone' },
  { command: 'redo', key: 'y', shift: false, does: 'Redo the edit undone' },
  { command: 'stage-1', key: '1', shift: false, does: 'Go to Events' },
  { command: 'stage-2', key: '2', shift: false, does: 'Go to Axes' },
  { command: 'stage-3', key: '3', shift: false, does: 'Go to Matrix' },
  { command: 'stage-4', key: '4', shift: false, does: 'Go to Audit' },
  { command: 'stage-5', key: '5', shift: false, does: 'Go to Hand over' },
  { command: 'shortcuts', key: '/', shift: false, does: 'Show this sheet' },
];

type Pressed = Pick<KeyboardEvent, 'key' | 'ctrlKey' | 'metaKey' | 'altKey' | 'shiftKey'>;

/** The command of a key press. Alt and a digit go to a stage too: a browser may keep Ctrl and a digit for itself. */
export function commandOf(press: Pressed, mac: boolean): Command | null {
  const main = mac ? press.metaKey && !press.ctrlKey : press.ctrlKey && !press.metaKey;
  const key = press.key.toLowerCase();
  if (press.altKey) return !main && /^[1-5]$/.test(key) ? (`stage-${key}` as Command) : null;
  if (!main) return null;
  return SHORTCUTS.find((one) => one.key === key && one.shift === press.shiftKey)?.command ?? null;
}

/** "Ctrl Shift S", or the signs of a Mac keyboard. */
export function keysOf({ key, shift }: Shortcut, mac: boolean): string {
  const name = key.toUpperCase();
  return mac ? `${shift ? '\u21e7' : ''}\u2318${name}` : `Ctrl ${shift ? 'Shift ' : ''}${name}`;
}
