import { mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { dirname } from 'node:path';
import type { Rectangle } from 'electron';
import { z } from '../../src/study/zod';

/** Smallest size at which the window is comfortable (look.md), and the one it first opens with. */
export const LEAST = { width: 1024, height: 700 };
const FIRST = { width: 1440, height: 900 };

const schema = z.object({
  x: z.int(),
  y: z.int(),
  width: z.int().min(LEAST.width),
  height: z.int().min(LEAST.height),
  maximised: z.boolean(),
});
export type WindowState = z.output<typeof schema>;

/** Where the window stood, if that place is still on a display; else only a size. */
export function readWindowState(
  path: string,
  displays: readonly Rectangle[],
): Partial<WindowState> & { width: number; height: number } {
  try {
    const state = schema.parse(JSON.parse(readFileSync(path, 'utf8')));
    if (displays.some((display) => overlap(display, state))) return state;
    return { width: state.width, height: state.height, maximised: state.maximised };
  } catch {
    return FIRST;
  }
}

/** Forgetting the place of a window is no fault worth a word. */
export function keepWindowState(path: string, state: WindowState): void {
  try {
    mkdirSync(dirname(path), { recursive: true });
    writeFileSync(path, JSON.stringify(state));
  } catch {
    return;
  }
}

function overlap(a: Rectangle, b: Rectangle): boolean {
  return a.x < b.x + b.width && b.x < a.x + a.width && a.y < b.y + b.height && b.y < a.y + a.height;
}
