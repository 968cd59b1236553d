import { execFileSync } from 'node:child_process';
import { existsSync, mkdirSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { chromium } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { findBrowser } from '../../main/browser';
import { printPdf } from '../../main/print-pdf';
import { writeReport } from '../../main/report';
import type { Flag } from '../../src/audit/flag';
import { CAUTIONS } from '../../src/handover/cautions';
import { parseManifest } from '../../src/handover/manifest';
import { entasis, ownFolder } from './entasis';

const folder = ownFolder();
afterAll(folder.remove);

const BROWSER = findBrowser();
const BUNDLE = folder.path('gallery.bundle');
const REPORT = folder.path('gallery-report.html');

/** Text as a reader sees it: no elements, entities resolved, any space one space. */
function textOf(html: string): string {
  const entities: Record<string, string> = { amp: '&', lt: '<', gt: '>', quot: '"', '#39': "'" };
  const bare = html.replace(/<style>.*?<\/style>/s, '').replace(/<[^>]*>/g, ' ');
  return bare.replace(/&([a-z0-9#]+);/g, (_, name: string) => entities[name]!).replace(/\s+/g, ' ');
}

const inText = (words: string): string => words.replace(/\s+/g, ' ');

/** Builds and reports an invented study of few events, and gives the report's HTML. */
async function reportOf(name: string, study: object, csv: string, more: Record<string, string> = {}): Promise<string> {
  mkdirSync(folder.path(name));
  const at = (file: string): string => join(folder.path(name), file);
  for (const [file, text] of Object.entries({ 'e.csv': csv, ...more })) writeFileSync(at(file), text);
  const head = { schema: 'entasis.study/1', events: { files: ['e.csv'] }, roles: { true: 't', reconstructed: 'r' } };
  writeFileSync(at('s.study.json'), JSON.stringify({ ...head, ensemble: { replicas: 32, seed: 5 }, ...study }));
  const built = await entasis('build', at('s.study.json'));
  expect(built.status, built.err).toBe(0);
  await writeReport({ bundle: at('s.bundle'), out: at('report.html'), pdf: false });
  return readFileSync(at('report.html'), 'utf8');
}

beforeAll(async () => {
  const built = await entasis('build', resolve('resources/demonstration/gallery.study.json'), '--out', BUNDLE);
  expect(built.status, built.err).toBe(0);
  const run = await entasis('report', BUNDLE);
  expect(run.status, run.err).toBe(0);
  expect(run.out).toContain(REPORT);
});

describe('the report of the demonstration', () => {
  const html = (): string => readFileSync(REPORT, 'utf8');
  const flags = (): Flag[] => JSON.parse(readFileSync(join(BUNDLE, 'flags.json'), 'utf8')) as Flag[];

  it('refers to nothing outside itself and runs no script', () => {
    expect(html()).not.toMatch(/<script|<img|<link|<iframe|<object|@import|@font-face|javascript:|\son[a-z]+=/i);
    expect(html().match(/(?:href|src|xlink:href)="(?!#)/g)).toBeNull();
    expect(html().match(/url\((?!#)/g)).toBeNull();
    const ids = new Set([...html().matchAll(/ id="([^"]*)"/g)].map(([, id]) => id));
    for (const [, target] of html().matchAll(/href="#([^"]*)"/g)) expect(ids).toContain(target);
    for (const [, target] of html().matchAll(/url\(#([^)]*)\)/g)) expect(ids).toContain(target);
  });

  it('states every raised flag with evidence and advice, and how many answers are clear', () => {
    const text = textOf(html());
    const raised = flags().filter(({ state }) => state !== 'clear');
    expect(raised.length).toBeGreaterThan(50);
    for (const { evidence, advice } of raised) {
      // The first letter is a capital there.
      expect(text).toContain(inText(evidence).slice(1));
      expect(text).toContain(inText(advice).slice(1));
    }
    const count = (state: Flag['state']): number => flags().filter((flag) => flag.state === state).length;
    expect(text).toContain(`in all ${count('flagged')} ${count('undecided')} ${count('clear')} `);
  });

  it('names each column under one verdict, on its first page', () => {
    const first = textOf(html().split('id="next"')[0]!);
    expect(first).toMatch(/Which columns may I trust\?.*Why\?.*What must I still measure\?/);
    // What the scenario builds in: nothing at 40 to 42 MeV, few events above 50 MeV, run 6 with another gain, a good middle.
    expect(first).toMatch(/As they stand [^▲]* 30 to 40 MeV \(5 columns\)/);
    expect(first).toMatch(/▲ Not as they stand .* 40 to 42 MeV, 46 MeV and up \(8 columns\)/);
    expect(first).toMatch(/▲ empty ▲ 40 to 42 MeV/);
    expect(first).toMatch(/run drift \(look at runs? "6"/);
  });

  it('shows the ledger as a balance, the hashes of every file, the seed and the fingerprint', () => {
    const manifest = parseManifest(readFileSync(join(BUNDLE, 'manifest.json'), 'utf8'), 'manifest.json');
    const text = textOf(html()).replace(/(?<=\d)\u202f(?=\d)/g, '');
    const { read, cut, rejected, tallied } = manifest.ledger;
    expect(cut + rejected + tallied).toBe(read);
    const plain = text.replace(/(\d) (?=\d{3}\b)/g, '$1');
    expect(plain).toContain(`sum ${read} sum ${read}`);
    for (const { sha256 } of [...manifest.inputs, ...Object.values(manifest.files)]) expect(text).toContain(sha256);
    expect(text).toContain(String(manifest.seed));
    expect(text).toContain(manifest.study.fingerprint);
    expect(text).toContain('is the one that the bundle holds');
  });

  it('bears the cautions on the first page and above the signatures', () => {
    const pages = html().split('id="sign-off"');
    for (const part of pages) for (const caution of CAUTIONS) expect(textOf(part)).toContain(caution);
    expect(textOf(pages[1]!)).toMatch(/Prepared by.*Checked by.*Approved by/);
  });

  it('has a text alternative for every picture', () => {
    const pictures = html().match(/<svg[^>]*>/g)!;
    expect(pictures.length).toBeGreaterThan(10);
    for (const picture of pictures) expect(picture).toMatch(/aria-label="[^"]+"|aria-hidden="true"/);
  });

  it('is the same to the byte when it is written again', async () => {
    const again = folder.path('again.html');
    expect((await entasis('report', BUNDLE, '--out', again)).status).toBe(0);
    expect(readFileSync(again).equals(readFileSync(REPORT))).toBe(true);
  });

  it.skipIf(!BROWSER)(
    `is read by a browser without a fault or a request${BROWSER ? '' : ' (no browser here)'}`,
    async () => {
      const args = ['--no-sandbox', '--disable-gpu', '--disable-quic'];
      const browser = await chromium.launch({ executablePath: BROWSER!, args });
      try {
        const page = await (await browser.newContext({ javaScriptEnabled: false })).newPage();
        const seen: string[] = [];
        page.on('console', (message) => seen.push(message.text()));
        page.on('request', (request) => seen.push(request.url()));
        await page.goto(`file://${REPORT}`);
        expect(seen).toEqual([`file://${REPORT}`]);
        expect(await page.locator('section').count()).toBe(14);
        // Nothing is wider than the page.
        await page.setViewportSize({ width: 900, height: 1200 });
        const widths = await page
          .locator('table, figure')
          .evaluateAll((all) => all.map((one) => one.scrollWidth - one.clientWidth));
        expect(Math.max(...widths)).toBeLessThanOrEqual(0);
      } finally {
        await browser.close();
      }
    },
  );
});

describe('the report as PDF', () => {
  it.skipIf(!BROWSER)(
    `has A4 pages, whole, and leaves nothing beside it${BROWSER ? '' : ' (no browser here)'}`,
    async () => {
      const pdf = folder.path('gallery.pdf');
      const run = await entasis('report', BUNDLE, '--pdf', '--out', pdf);
      expect(run.status, run.err).toBe(0);
      const bytes = readFileSync(pdf).toString('latin1');
      expect(bytes).toMatch(/^%PDF-1\.\d/);
      expect(bytes.trimEnd()).toMatch(/%%EOF$/);
      // A4 is 210 mm x 297 mm (ISO 216), 595.28 by 841.89 points.
      const [, width, height] = /\/MediaBox \[0 0 ([\d.]+) ([\d.]+)\]/.exec(bytes)!;
      expect([Math.round(Number(width)), Math.round(Number(height))]).toEqual([595, 842]);
      expect(readdirSync(folder.path('.')).filter((name) => name.startsWith('.'))).toEqual([]);
    },
  );

  it('is refused in one line where no browser is here, and leaves nothing behind', async () => {
    const before = { PATH: process.env['PATH'], ENTASIS_BROWSER: process.env['ENTASIS_BROWSER'] };
    const out = folder.path('never.pdf');
    try {
      process.env['PATH'] = folder.path('nowhere');
      delete process.env['ENTASIS_BROWSER'];
      if (findBrowser() === null) {
        await expect(writeReport({ bundle: BUNDLE, out, pdf: true })).rejects.toThrow(
          /^--pdf: no Chromium-family browser is here to print it: install one, /,
        );
      }
      process.env['ENTASIS_BROWSER'] = process.execPath;
      await expect(printPdf(REPORT, out)).rejects.toThrow(/could not be printed: it ended with status \d+/);
    } finally {
      for (const [name, value] of Object.entries(before)) {
        if (value === undefined) delete process.env[name];
        else process.env[name] = value;
      }
    }
    expect(existsSync(out)).toBe(false);
  });
});

describe('a report that cannot be written', () => {
  it('is refused for a bundle that somebody changed', async () => {
    const changed = folder.path('changed.bundle');
    execFileSync('cp', ['-r', BUNDLE, changed]);
    const path = join(changed, 'posterior', 'mean.npy');
    const bytes = readFileSync(path);
    bytes[bytes.length - 1]! ^= 1;
    writeFileSync(path, bytes);
    const run = await entasis('report', changed);
    expect(run.status).toBe(2);
    expect(run.err).toMatch(
      /^entasis: .*mean\.npy: was changed: its SHA-256 is not the manifest’s: build or copy .*\n$/,
    );
    expect(existsSync(folder.path('changed-report.html'))).toBe(false);
  });

  it('is refused inside the bundle, and for what is no bundle', async () => {
    expect((await entasis('report', BUNDLE, '--out', join(BUNDLE, 'report.html'))).err).toMatch(
      /lies inside the bundle/,
    );
    expect((await entasis('report', folder.path('no.bundle'))).err).toMatch(/^entasis: .*no such file.*\n$/);
  });

  it('leaves an old report where it is', async () => {
    const out = folder.path('old.html');
    writeFileSync(out, 'old');
    await expect(writeReport({ bundle: BUNDLE, out, pdf: false, replace: false })).rejects.toThrow('is there already');
    expect(readFileSync(out, 'utf8')).toBe('old');
  });
});

describe('a report of an odd study', () => {
  /** No number that is none, on no page. */
  const expectClean = (html: string): void => {
    expect(html.match(/NaN|undefined|Infinity|\[object|>null</g)).toBeNull();
  };

  it('of tags without recorded losses says what is not measurable, and why', async () => {
    const rows = ['t,r', ...Array.from({ length: 60 }, (_, i) => `${i % 3 ? 'pion' : 'electron'},${(i * 7) % 10}`)];
    const study = {
      title: '<script>alert("1")</script> & co',
      lost: 'unrecorded',
      axes: {
        true: { label: 'Species', tags: ['electron', 'pion', 'muon'] },
        reconstructed: { from: 0, to: 10, bins: 2 },
      },
      prior: { pseudoTotal: 1 },
    };
    const html = await reportOf('tags', study, `${rows.join('\n')}\n`);
    expectClean(html);
    expect(html).not.toContain('<script');
    const text = textOf(html);
    expect(text).toContain('<script>alert("1")</script> & co');
    expect(text).toContain('Losses were not recorded');
    expect(text).toMatch(/Not measurable here: .*losses are not recorded/i);
    expect(text).toMatch(/▲ empty ▲ muon/);
  });

  it('of one bin by one bin, of few events, is whole', async () => {
    const axes = { true: { from: 0, to: 1, bins: 1 }, reconstructed: { from: 0, to: 1, bins: 1 } };
    const html = await reportOf('one', { axes }, 't,r\n0.5,0.4\n0.2,\n0.7,3\n');
    expectClean(html);
    expect(textOf(html)).toContain('▲ thin');
  });

  it('of no event inside the axes is whole, and asks for events', async () => {
    const axes = { true: { from: 0, to: 1, bins: 2 }, reconstructed: { from: 0, to: 1, bins: 2 } };
    const html = await reportOf('none', { axes }, 't,r\n-1,-1\n');
    expectClean(html);
    expect(textOf(html)).toMatch(/▲ empty ▲ 0 and up \(3 columns\)/);
    expect(textOf(html)).toMatch(/As they stand no flag is raised none/);
    expect(textOf(html)).toMatch(/more calibration events \(there are 1\)/);
  });

  it('on log axes, with a reference table, the neighbour prior and background, is whole', async () => {
    const rows = Array.from({ length: 3000 }, (_, i) => {
      const t = 10 ** (2 * ((i * 0.6180339887) % 1));
      return `${i % 50 === 0 ? '' : t},${i % 9 === 0 ? '' : t * (1 + 0.1 * Math.sin(i))}`;
    });
    const study = {
      unmatched: 'count',
      axes: {
        true: { label: 'E', unit: 'eV', from: 1, to: 100, bins: 8, spacing: 'log' },
        reconstructed: { label: 'E', unit: 'eV', from: 1, to: 100, bins: 8, spacing: 'log' },
      },
      prior: { neighbours: {} },
      reference: { kind: 'table', file: 'spectrum.csv', events: 1000 },
    };
    const html = await reportOf('log', study, `t,r\n${rows.join('\n')}\n`, {
      'spectrum.csv': 'lo,hi,content\n1,10,3\n10,100,1\n',
    });
    expectClean(html);
    const text = textOf(html);
    expect(text).toMatch(/highest at a strength of [\d. ]+ pseudo-counts/);
    expect(text).toContain('Events without a true value');
    // Jeffreys's posterior mean of a Poisson content is the events and a half.
    expect(text).toMatch(/Outcome Events Content .* 10 to 17\.8 eV (\d+) \1\.5 \(/);
    expect(text).toContain('table spectrum.csv from 1 to 100 eV, 1000 events');
    expect(text).toMatch(/Purity, %/);
  });
});
