import { cpSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { AxeBuilder } from '@axe-core/playwright';
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { openWindow } from './window';

/** What axe calls serious or worse; the rules are those of WCAG 2.2 at levels A and AA (https://www.w3.org/TR/WCAG22/). */
const SERIOUS = ['serious', 'critical'];
const RULES = ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'];

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'entasis-axe-'));
  cpSync(resolve('resources/demonstration'), folder, { recursive: true });
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

async function faultsOf(page: Page): Promise<string[]> {
  const { violations } = await new AxeBuilder({ page }).withTags(RULES).analyze();
  const serious = violations.filter(({ impact }) => SERIOUS.includes(impact ?? ''));
  return serious.flatMap(({ id, nodes }) => nodes.map(({ target }) => `${id}: ${target.join(' ')}`));
}

/** How to come to each place, and what stands there once it is whole. */
const PLACES: { name: string; go: (page: Page) => Promise<void> }[] = [
  { name: 'Events', go: (page) => shown(page, 'Alt+1', /SHA-256/) },
  { name: 'Axes', go: (page) => shown(page, 'Alt+2', /True axis/) },
  { name: 'Matrix', go: (page) => shown(page, 'Alt+3', /Point at a cell/) },
  { name: 'Audit', go: (page) => shown(page, 'Alt+4', /Where flags stand/) },
  { name: 'Hand over', go: (page) => shown(page, 'Alt+5', /Hand the ensemble over/) },
  { name: 'Shortcuts', go: (page) => shown(page, 'Control+/', /Save the study elsewhere/) },
];

async function shown(page: Page, keys: string, text: RegExp): Promise<void> {
  await page.keyboard.press(keys);
  await page.getByText(text).first().waitFor();
}

describe.each([{ dark: false }, { dark: true }])('the window (dark: $dark)', ({ dark }) => {
  it('has nothing serious for axe at its start and in any stage', async () => {
    const empty = await openWindow({ folder, dark });
    const found: Record<string, string[]> = {};
    try {
      await empty.page.getByRole('button', { name: 'Choose event files' }).waitFor();
      found['Start'] = await faultsOf(empty.page);
    } finally {
      await empty.close();
    }
    const window = await openWindow({ folder, study: join(folder, 'gallery.study.json'), dark });
    try {
      const { page } = window;
      await page
        .getByText(/^read .* = cut/)
        .first()
        .waitFor();
      for (const { name, go } of PLACES) {
        await go(page);
        found[name] = await faultsOf(page);
      }
      expect(found).toStrictEqual(Object.fromEntries(Object.keys(found).map((name) => [name, []])));
      expect(window.faults).toStrictEqual([]);
    } finally {
      await window.close();
    }
  });
});
