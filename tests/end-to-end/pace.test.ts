import { closeSync, mkdtempSync, openSync, rmSync, writeFileSync, writeSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { openWindow, type OpenWindow } from './window';

/** What the window promises on two free cores. */
const LONGEST_TASK_MS = 50;
const MOVED_EDGE_MS = 300;
/** Tests share their machine: they fail beyond this many times the promise, and print what they measured. */
const SLACK = 5;

const EVENTS = 5_000_000;
const ROWS_A_BLOCK = 10_000;

let folder: string;
let window: OpenWindow;

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'entasis-pace-'));
  writeEvents(join(folder, 'events.csv'));
  writeFileSync(join(folder, 'pace.study.json'), JSON.stringify(study()));
  window = await openWindow({ folder });
});
afterAll(async () => {
  await window.close();
  rmSync(folder, { recursive: true, force: true });
});

describe('five million events', () => {
  it('are read without holding up the window', async () => {
    const { page } = window;
    await page.getByRole('button', { name: 'Open a study' }).waitFor();
    await watchTasks(page);
    const began = performance.now();
    await page.getByRole('button', { name: 'Open a study' }).click();
    await page.getByRole('button', { name: 'pace.study.json' }).click();
    await page
      .getByText(/read 5.000.000 = /)
      .first()
      .waitFor({ timeout: 60_000 });
    const seconds = (performance.now() - began) / 1000;
    const longest = await longestTask(page);
    console.log(
      `5,000,000 events read in ${seconds.toFixed(1)} s; longest task of the window ${longest.toFixed(0)} ms`,
    );
    expect(longest).toBeLessThan(SLACK * LONGEST_TASK_MS);
  });

  it('are tallied again while an edge moves, and the picture follows', async () => {
    const { page } = window;
    await page.keyboard.press('Alt+2');
    const edge = page.getByRole('slider').first();
    await edge.waitFor();
    await page.getByText('Effective entries').first().waitFor();
    const times: number[] = [];
    for (let i = 0; i < 6; i++) {
      await edge.focus();
      times.push(
        await untilPopulationChanges(page, () => page.keyboard.press(i % 2 === 0 ? 'ArrowRight' : 'ArrowLeft')),
      );
    }
    const median = times.sort((a, b) => a - b)[times.length >> 1]!;
    console.log(`an edge moved: the population follows in ${median.toFixed(0)} ms (median of ${times.length})`);
    expect(median).toBeLessThan(SLACK * MOVED_EDGE_MS);
    expect(window.faults).toStrictEqual([]);
  });
});

/** Notes every task of the page's thread that takes longer than 50 ms (Long Tasks API of the W3C). */
async function watchTasks(page: Page): Promise<void> {
  await page.evaluate(() => {
    const seen: number[] = [];
    Object.assign(globalThis, { longTasks: seen });
    new PerformanceObserver((list) => list.getEntries().forEach(({ duration }) => seen.push(duration))).observe({
      entryTypes: ['longtask'],
    });
  });
}

async function longestTask(page: Page): Promise<number> {
  const tasks = await page.evaluate(() => (globalThis as unknown as { longTasks: number[] }).longTasks);
  return Math.max(0, ...tasks);
}

/** Milliseconds from `act` until the heights of the population's bars are others. */
async function untilPopulationChanges(page: Page, act: () => Promise<void>): Promise<number> {
  const changed = page.evaluate(() => {
    const figure = [...document.querySelectorAll('figure')].find((one) => /Effective entries/.test(one.textContent))!;
    const heights = (): string => {
      const numbers =
        figure
          .querySelector('svg path')
          ?.getAttribute('d')
          ?.match(/-?[\d.]+/g) ?? [];
      return numbers.filter((_, i) => i % 2 === 1).join(' ');
    };
    const before = heights();
    const began = performance.now();
    return new Promise<number>((resolve) => {
      const look = (): void => {
        if (heights() !== before) resolve(performance.now() - began);
        else requestAnimationFrame(look);
      };
      look();
    });
  });
  await act();
  return changed;
}

/** Evenly spread true values with a response of constant width; seeded by nothing: the numbers are a rule. */
function writeEvents(path: string): void {
  const file = openSync(path, 'w');
  writeSync(file, 'e_true,e_reco\n');
  for (let block = 0; block < EVENTS / ROWS_A_BLOCK; block++) {
    let text = '';
    for (let i = 0; i < ROWS_A_BLOCK; i++) {
      const n = block * ROWS_A_BLOCK + i;
      const truth = ((n * 0.6180339887498949) % 1) * 100;
      text += `${truth.toFixed(3)},${(truth + ((n * 7919) % 1000) / 250 - 2).toFixed(3)}\n`;
    }
    writeSync(file, text);
  }
  closeSync(file);
}

function study() {
  const axis = { from: 0, to: 100, bins: 100, unit: 'MeV' };
  return {
    schema: 'entasis.study/1',
    title: 'Pace',
    events: { files: ['events.csv'] },
    roles: { true: 'e_true', reconstructed: 'e_reco' },
    axes: { true: { ...axis, label: 'True' }, reconstructed: { ...axis, label: 'Reconstructed' } },
  };
}
