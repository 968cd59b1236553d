/**
 * Takes a picture of every stage of the window, at two sizes, light and dark, from the demonstration campaign:
 * `npm run screens [-- FOLDER]`, into `screens/` unless told otherwise. They are for eyes, not compared by machine.
 */
import { spawn } from 'node:child_process';
import { cpSync, existsSync, mkdirSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { chromium } from 'playwright-core';

const CHROMIUM = process.env.ENTASIS_BROWSER ?? '/usr/bin/chromium';
const FLAGS = ['--no-sandbox', '--disable-gpu', '--no-first-run', '--disable-background-networking', '--disable-sync'];
const SIZES = [
  { width: 1280, height: 800 },
  { width: 1920, height: 1080 },
];
/** Long enough for an audit of the demonstration on a slow machine. */
const PATIENCE_MS = 60_000;

/** What is to be seen, in the order of the work. */
const PLACES = [
  { name: 'events', go: (page) => page.keyboard.press('Alt+1') },
  { name: 'rejected', go: (page) => page.getByRole('button', { name: /^rejected/ }).click() },
  { name: 'axes', go: (page) => page.keyboard.press('Alt+2') },
  { name: 'matrix', go: (page) => page.keyboard.press('Alt+3') },
  { name: 'matrix-cell', go: chooseCell },
  { name: 'matrix-column', go: (page) => page.getByRole('button', { name: 'Show its column' }).click() },
  { name: 'audit-flags', go: (page) => page.keyboard.press('Alt+4') },
  ...['Measures', 'Tables', 'Influence', 'Drift', 'Conditioning', 'Prior', 'Rehearsal', 'Comparison'].map((view) => ({
    name: `audit-${view.toLowerCase()}`,
    go: (page) => page.getByRole('navigation').getByRole('button', { name: view, exact: true }).click(),
  })),
  { name: 'hand-over', go: (page) => page.keyboard.press('Alt+5') },
  { name: 'written', go: writeBundle },
];

const out = resolve(process.argv[2] ?? 'screens');
const command = resolve('out/main/command.js');
if (!existsSync(command)) throw new Error('the program is not built: run `npm run build` first');

const campaign = mkdtempSync(join(tmpdir(), 'entasis-screens-'));
cpSync(resolve('resources/demonstration'), campaign, { recursive: true });
const browser = await chromium.launch({ executablePath: CHROMIUM, args: FLAGS });
mkdirSync(out, { recursive: true });
try {
  for (const dark of [false, true]) for (const size of SIZES) await take(size, dark);
} finally {
  await browser.close();
  rmSync(campaign, { recursive: true, force: true });
}

async function take(size, dark) {
  const save = (page, name) =>
    page.screenshot({ path: join(out, `${name}-${size.width}-${dark ? 'dark' : 'light'}.png`) });
  await inWindow([], size, dark, async (page) => {
    await page.getByRole('button', { name: 'Choose event files' }).waitFor();
    await save(page, 'start');
    await page.keyboard.press('Control+/');
    await save(page, 'shortcuts');
  });
  await inWindow([join(campaign, 'gallery.study.json')], size, dark, async (page) => {
    await page.getByText(/^read .* = cut/).waitFor();
    await page.getByRole('progressbar').waitFor({ state: 'detached' });
    for (const place of PLACES) {
      await place.go(page);
      await settled(page);
      await save(page, place.name);
    }
  });
}

async function chooseCell(page) {
  await page.getByLabel(/^Response matrix/).click();
  await page.getByRole('heading', { name: 'Posterior density' }).waitFor();
}

async function writeBundle(page) {
  await page.getByRole('button', { name: /^Write [\d\s]+ replicas$/u }).click();
  await page.getByRole('button', { name: /^(Choose|Replace it)$/ }).click();
  const replace = page.getByRole('button', { name: 'Replace it' });
  const written = page.getByRole('heading', { name: /^Written to/ });
  await replace.or(written).first().waitFor();
  if (await replace.isVisible()) await replace.click();
  await written.waitFor();
}

/** Answers are in and drawn. */
async function settled(page) {
  await page.waitForTimeout(400);
  await page.waitForFunction(() => !/being tried|working out|following/i.test(document.body.innerText));
  await page.waitForTimeout(400);
}

async function inWindow(args, size, dark, work) {
  const state = mkdtempSync(join(tmpdir(), 'entasis-state-'));
  const server = spawn(process.execPath, [command, 'serve', '--json', ...args], {
    cwd: campaign,
    env: { ...process.env, XDG_STATE_HOME: state },
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  const context = await browser.newContext({ viewport: size, colorScheme: dark ? 'dark' : 'light' });
  try {
    const page = await context.newPage();
    page.setDefaultTimeout(PATIENCE_MS);
    await page.goto(await addressOf(server));
    await work(page);
  } finally {
    await context.close();
    server.kill('SIGINT');
    rmSync(state, { recursive: true, force: true, maxRetries: 5, retryDelay: 100 });
  }
}

function addressOf(server) {
  return new Promise((found, reject) => {
    let printed = '';
    server.stdout.on('data', (part) => {
      printed += part;
      const end = printed.indexOf('\n');
      if (end >= 0) found(JSON.parse(printed.slice(0, end)).url);
    });
    server.once('exit', () => reject(new Error('the program ended before it served')));
  });
}
