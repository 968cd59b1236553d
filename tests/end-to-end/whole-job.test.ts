import { cpSync, existsSync, mkdtempSync, readFileSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, relative, resolve } from 'node:path';
import type { Page } from 'playwright-core';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { entasis } from '../main/entasis';
import { openWindow, type OpenWindow } from './window';

let folder: string;
let window: OpenWindow | null = null;
const at = (...parts: string[]) => join(folder, ...parts);

beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'entasis-job-'));
});
afterEach(async () => {
  const faults = window?.faults ?? [];
  await window?.close();
  window = null;
  rmSync(folder, { recursive: true, force: true });
  expect(faults, 'errors on the console').toStrictEqual([]);
});

async function opened(): Promise<Page> {
  window = await openWindow({ folder });
  return window.page;
}

/** Files of a folder with their bytes, by path inside it. */
function contents(of: string): Map<string, Buffer> {
  const entries = readdirSync(of, { recursive: true, withFileTypes: true }).filter((entry) => entry.isFile());
  const paths = entries.map((entry) => join(entry.parentPath, entry.name)).sort();
  return new Map(paths.map((path) => [relative(of, path), readFileSync(path)]));
}

/** The bundle of the window is that of the command line for the same study, file by file and to the byte. */
async function expectSameBundle(study: string, bundle: string): Promise<void> {
  const { status, err } = await entasis('build', study, '--out', at('line.bundle'));
  expect(status, err).toBe(0);
  const [window, line] = [contents(bundle), contents(at('line.bundle'))];
  expect([...window.keys()]).toStrictEqual([...line.keys()]);
  for (const [name, bytes] of line) expect(window.get(name)!.equals(bytes), name).toBe(true);
}

const rail = (page: Page) => page.getByRole('navigation', { name: 'Stages' });
const stage = (page: Page, name: RegExp) => rail(page).getByRole('button', { name });
const panel = (page: Page) => page.getByRole('complementary', { name: 'What is chosen' });
const button = (page: Page, name: string | RegExp) => page.getByRole('button', { name });

describe('the whole job by mouse', () => {
  it('leads from the demonstration campaign to a verified bundle, the one that the command line writes', async () => {
    cpSync(resolve('resources/demonstration'), at('campaign'), { recursive: true });
    const page = await opened();

    await button(page, 'Open a study').click();
    await button(page, 'campaign/').click();
    await button(page, 'gallery.study.json').click();
    await page
      .getByText(/read [\d\s\u202f\u2009]+ = cut/)
      .first()
      .waitFor();

    // The ledger balances, and its rejected rows stand open with their lines.
    await button(page, /^rejected \d+$/).click();
    await page.getByText('quote not closed').first().waitFor();

    await stage(page, /Axes/).click();
    await button(page, 'Edit by numbers').first().click();
    await page.getByText('Let the events place the edges').waitFor();
    await stage(page, /Matrix/).click();
    await page.getByText(/Point at a cell/).waitFor();
    await page.getByLabel(/^Response matrix/).click();
    await panel(page).getByRole('heading', { name: 'Posterior density' }).waitFor();
    await stage(page, /Audit/).click();
    await page.getByText('Where flags stand').waitFor();
    await page.getByRole('button', { name: 'Thin', exact: true }).first().click();

    await stage(page, /Hand over/).click();
    await button(page, 'Choose a folder').click();
    await button(page, 'Choose').last().click();
    await button(page, /^Write 1.000 replicas$/).click();
    await page.getByRole('heading', { name: /^Written to/ }).waitFor();
    await button(page, 'Verify the bundle').click();
    await page.getByText('Everything holds.').waitFor();

    await expectSameBundle(at('campaign', 'gallery.study.json'), at('campaign', 'gallery.bundle'));
  });

  it('makes a study from files with bad rows alone, and hands it over', async () => {
    writeFileSync(at('bench.csv'), eventsWithBadRows());
    const page = await opened();

    await button(page, 'Choose event files').click();
    await page.getByRole('checkbox', { name: 'bench.csv' }).check();
    await button(page, 'Add 1 file').click();

    // Roles and axes are proposed; the ledger follows by itself or when asked.
    await expectRole(page, 'e_true', 'true');
    await expectRole(page, 'e_reco', 'reconstructed');
    await readIfAsked(page);
    await page
      .getByText('read 3 004 = ')
      .or(page.getByText(/read 3.004 = /))
      .first()
      .waitFor();
    await expectRejected(page, { 'not a number': '3 002', 'no true value': '3 003', 'too many fields': '3 004' });

    await stage(page, /Axes/).click();
    await button(page, 'Edit by numbers').first().click();
    const bins = page.getByLabel('Bins', { exact: true }).first();
    await bins.fill('12');
    await bins.press('Enter');
    await button(page, 'Place edges').click();
    await page.getByText('20 bins with equal numbers of events').waitFor();
    await button(page, /Undo/).click();
    await page.keyboard.press('Control+s');
    await page.getByLabel('Name').fill('bench.study.json');
    await button(page, 'Save').last().click();
    await expect.poll(() => existsSync(at('bench.study.json'))).toBe(true);

    await stage(page, /Hand over/).click();
    await button(page, /^Write 1.000 replicas$/).click();
    await button(page, 'Choose').last().click();
    await page.getByRole('heading', { name: /^Written to/ }).waitFor();

    const saved = JSON.parse(readFileSync(at('bench.study.json'), 'utf8')) as { axes: { true: { bins: number } } };
    expect(saved.axes.true.bins).toBe(12);
    await expectSameBundle(at('bench.study.json'), at('bench.bundle'));
  });
});

describe('the whole job by keyboard alone', () => {
  it('opens a study, goes through its stages, and writes the bundle', async () => {
    writeFileSync(at('bench.csv'), eventsWithBadRows());
    writeFileSync(at('keys.study.json'), JSON.stringify(studyOfKeys()));
    const page = await opened();
    await button(page, 'Open a study').waitFor();

    await page.keyboard.press('Control+o');
    await tabTo(page, /Folder or path/);
    await page.keyboard.press('Control+a');
    await page.keyboard.type(at('keys.study.json'));
    await page.keyboard.press('Enter');
    await page
      .getByText(/read 3.004 = /)
      .first()
      .waitFor();

    await page.keyboard.press('Alt+3');
    await page.getByText(/Point at a cell/).waitFor();
    await tabTo(page, /matrix|heat map/i);
    await page.keyboard.press('ArrowUp');
    await page.keyboard.press('ArrowRight');
    await page.keyboard.press('Alt+4');
    await page.getByText('Where flags stand').waitFor();

    await page.keyboard.press('Alt+5');
    await tabTo(page, /^Write 50 replicas$/);
    await page.keyboard.press('Enter');
    await tabTo(page, /^Choose$/);
    await page.keyboard.press('Enter');
    await page.getByRole('heading', { name: /^Written to/ }).waitFor();
    await tabTo(page, /^Verify the bundle$/);
    await page.keyboard.press('Enter');
    await page.getByText('Everything holds.').waitFor();

    await expectSameBundle(at('keys.study.json'), at('keys.bundle'));
  });
});

describe('a window that is loaded again', () => {
  it('keeps its session and offers the edits that were not saved', async () => {
    writeFileSync(at('bench.csv'), eventsWithBadRows());
    writeFileSync(at('keys.study.json'), JSON.stringify(studyOfKeys()));
    const page = await opened();
    await button(page, 'Open a study').click();
    await button(page, 'keys.study.json').click();
    await page
      .getByText(/read 3.004 = /)
      .first()
      .waitFor();
    await page.getByLabel('Title of the study').fill('Edited by keys');
    await page.getByLabel('Title of the study').press('Enter');
    await page.waitForResponse((response) => response.url().endsWith('/call/keepDraft'));
    await page.reload();
    await button(page, 'Continue it').click();
    await expect.poll(() => page.getByLabel('Title of the study').inputValue()).toBe('Edited by keys');
  });
});

async function expectRole(page: Page, field: string, role: string): Promise<void> {
  const select = page.getByRole('combobox', { name: `Role of ${field}` });
  await select.waitFor();
  await expect.poll(() => select.inputValue()).toBe(role);
}

async function readIfAsked(page: Page): Promise<void> {
  const ask = button(page, /^Read \d+ files?$/);
  const ledger = page.getByText(/read 3.004 = /).first();
  await ask.or(ledger).first().waitFor();
  if (await ask.isVisible()) await ask.click();
}

/** Each reason, opened from the foot or the list beside, shows the line of its row. */
async function expectRejected(page: Page, lines: Record<string, string>): Promise<void> {
  await button(page, /^rejected \d+$/).click();
  for (const [reason, line] of Object.entries(lines)) {
    await button(page, reason).first().click();
    const rows = page.getByRole('region', { name: 'Rejected rows' });
    await rows.getByText(new RegExp(`bench.csv, ${line.replace(' ', '.')}`)).waitFor();
  }
}

/** Presses Tab until what has the focus is named so; fails after as many as no frame needs. */
async function tabTo(page: Page, name: RegExp): Promise<void> {
  const MOST_TABS = 120;
  for (let i = 0; i < MOST_TABS; i++) {
    const label = await page.evaluate(() => {
      const element = document.activeElement;
      if (!element || element === document.body) return '';
      const labels = (element as HTMLInputElement).labels;
      const text = element.getAttribute('aria-label') ?? labels?.[0]?.textContent ?? element.textContent ?? '';
      return text.replace(/\s+/g, ' ').trim();
    });
    if (name.test(label)) return;
    await page.keyboard.press('Tab');
  }
  throw new Error(`no way by Tab to ${name}`);
}

/** 3,000 good rows of a response one unit wide, and four that are not: each has its line and reason. */
function eventsWithBadRows(): string {
  const lines = ['e_true,e_reco,run'];
  for (let i = 0; i < 3000; i++) {
    const truth = (i % 100) + 0.5;
    const reco = i % 10 === 0 ? '' : String(truth + (((i * 7) % 11) - 5) / 5);
    lines.push(`${truth},${reco},run${i % 3}`);
  }
  lines.push('broken,3,run0', ',3,run0', '5,5,run0,surplus', '"5,5,run0');
  return `${lines.join('\n')}\n`;
}

function studyOfKeys() {
  return {
    schema: 'entasis.study/1',
    title: 'By keys',
    events: { files: ['bench.csv'] },
    roles: { true: 'e_true', reconstructed: 'e_reco', run: 'run' },
    axes: {
      true: { label: 'True', unit: 'MeV', from: 0, to: 100, bins: 10 },
      reconstructed: { label: 'Reconstructed', unit: 'MeV', from: 0, to: 100, bins: 10 },
    },
    ensemble: { replicas: 50, seed: 3 },
  };
}
