#!/usr/bin/env node
import { Command, CommanderError, InvalidArgumentError, Option } from 'commander';
import { availableParallelism } from 'node:os';
import { parseReplicaRange } from '../src/handover/handover-options';
import { Cancelled, InputError } from '../src/study/input-error';
import { endStartedEarly, startEarly } from './pool';
import type { Surroundings } from './surroundings';
import { VERSION } from './version';

/** Exit statuses, part of what the command line promises. */
const DONE = 0;
const DOES_NOT_HOLD = 1;
const BAD_INPUT = 2;
const CANCELLED = 130;

const READ_WORKER = new URL('./read-worker.js', import.meta.url);
const DRAW_WORKER = new URL('./draw-worker.js', import.meta.url);

const cancel = new AbortController();
const surroundings: Surroundings = {
  readWorker: READ_WORKER,
  drawWorker: DRAW_WORKER,
  version: VERSION,
  signal: cancel.signal,
};

function wholeNumber(least: number) {
  return (text: string): number => {
    const value = Number(text);
    if (!/^\d+$/.test(text) || value < least) throw new InvalidArgumentError(`needs a whole number from ${least} up`);
    return value;
  };
}

function shareOption(text: string): number {
  const value = Number(text);
  if (!(value > 0 && value < 1)) throw new InvalidArgumentError('needs a number between 0 and 1');
  return value;
}

const workersOption = (): Option =>
  new Option('--workers <n>', 'worker threads; the result does not depend on it')
    .argParser(wholeNumber(1))
    .default(availableParallelism(), 'the processors of this machine');
const jsonOption = (): Option => new Option('--json', 'one JSON document on standard output instead of text');

const CAUTIONS_HELP = `
The uncertainty given is the statistical uncertainty of the calibration only; systematic effects are yours to add.
Not a certified dosimetry or safety instrument: local codes and licensed or accredited practice come first.

Exit status: 0 done; 1 what was checked does not hold; 2 bad input or usage; 130 cancelled.`;

function program(): Command {
  const entasis = new Command('entasis')
    .description(
      'Response matrices from tagged events, with the uncertainty of every column, an audit, and an ensemble of replicas.',
    )
    .version(VERSION)
    .addHelpText('after', CAUTIONS_HELP)
    .helpCommand(false)
    .showSuggestionAfterError(false);

  entasis
    .command('inspect')
    .description('columns, types, rows, missing and non-finite values, ranges, and a starting study')
    .argument('<file...>', 'event files (CSV, TSV, Parquet, NDJSON, ...; gzip and zstd too)')
    .option('--study <path>', 'write the starting study there')
    .addOption(jsonOption())
    .action(async (files: string[], options) => {
      const { inspect } = await import('./commands/inspect');
      await inspect(files, options, surroundings);
    });

  entasis
    .command('build')
    .description('event files to bundle: tally, posterior, audit, ensemble')
    .argument('<study>', 'study document (*.study.json)')
    .option('--out <folder>', "the bundle; by default the study's name beside it")
    .option('--from <part...>', 'build from tallied parts instead of the event files')
    .addOption(
      new Option(
        '--digits <d>',
        "as many replicas as so many significant digits need, instead of the study's",
      ).argParser(wholeNumber(1)),
    )
    .addOption(workersOption())
    .addOption(jsonOption())
    .action(async (study: string, options) => {
      startEarly(options.from ? DRAW_WORKER : READ_WORKER, options.workers);
      const { build } = await import('./commands/build');
      await build(study, options, surroundings);
    });

  entasis
    .command('tally')
    .description("tally some or all of a study's files into a part, for a batch system")
    .argument('<study>', 'study document')
    .requiredOption('--out <part>', 'folder of the part')
    .option('--files <glob...>', "files to read instead of all the study's; relative to the study's folder")
    .addOption(workersOption())
    .addOption(jsonOption())
    .action(async (study: string, options) => {
      startEarly(READ_WORKER, options.workers);
      const { tally } = await import('./commands/tally');
      await tally(study, options, surroundings);
    });

  entasis
    .command('combine')
    .description('join parts into one; the result does not depend on their order')
    .argument('<part...>', 'parts that `entasis tally` has written')
    .requiredOption('--out <part>', 'folder of the joined part')
    .addOption(jsonOption())
    .action(async (parts: string[], options) => {
      const { combine } = await import('./commands/tally');
      await combine(parts, options);
    });

  entasis
    .command('verify')
    .description('hashes, invariants, and replicas drawn again from seed and tally')
    .argument('<bundle>', 'folder of a bundle, or a file that `entasis convert` wrote')
    .option('--against <bundle>', 'compare such a file with the bundle it was made of, number by number')
    .addOption(workersOption())
    .addOption(jsonOption())
    .action(async (bundle: string, options) => {
      const { verify } = await import('./commands/verify');
      if (!(await verify(bundle, options, surroundings))) process.exitCode = DOES_NOT_HOLD;
    });
  entasis
    .command('draw')
    .description("replicas from a bundle's posterior into one NPY file: more of them, or under another seed")
    .argument('<bundle>', 'folder of a bundle')
    .requiredOption('--out <file>', 'the NPY file to write')
    .addOption(new Option('--replicas <n>', "how many; by default as many as the bundle's").argParser(wholeNumber(0)))
    .addOption(
      new Option('--seed <n>', "by default the bundle's: the first replicas are then the bundle's own").argParser(
        wholeNumber(0),
      ),
    )
    .option('--hash', 'tell the SHA-256 of the file')
    .addOption(workersOption())
    .addOption(jsonOption())
    .action(async (bundle: string, options) => {
      startEarly(DRAW_WORKER, options.workers);
      const { draw } = await import('./commands/draw');
      await draw(bundle, options, surroundings);
    });

  entasis
    .command('convert')
    .description('a bundle as one file of another format')
    .argument('<bundle>', 'folder of a bundle')
    .requiredOption('--to <format>', 'npz, hdf5, parquet, arrow, csv, json or fits')
    .requiredOption('--out <file>', 'the file to write')
    .addOption(
      new Option('--replicas <A..B>', 'only replicas A to B, both included, counted from 0').argParser((text: string) =>
        parseReplicaRange(text),
      ),
    )
    .addOption(jsonOption())
    .action(async (bundle: string, options) => {
      const { convert } = await import('./commands/convert');
      await convert(bundle, options, surroundings);
    });

  entasis
    .command('report')
    .description('a bundle as one HTML file to read and sign, or as PDF')
    .argument('<bundle>', 'folder of a bundle')
    .option('--out <file>', "the file to write; by default the bundle's name beside it")
    .option('--pdf', 'as PDF, printed by a Chromium-family browser of this machine')
    .addOption(jsonOption())
    .action(async (bundle: string, options) => {
      const { report } = await import('./commands/report');
      await report(bundle, options, surroundings);
    });

  entasis
    .command('compare')
    .description('two campaigns of the same axes: what differs, column by column, and in the folded reference spectrum')
    .argument('<A>', 'folder of a bundle or a part')
    .argument('<B>', 'the other one')
    .addOption(jsonOption())
    .action(async (first: string, second: string, options) => {
      const { compare } = await import('./commands/compare');
      await compare(first, second, options);
    });

  entasis
    .command('plan')
    .description('events to add to each column: for the limits of the study, for a target, or what N more would bring')
    .argument('<bundle>', 'folder of a bundle')
    .addOption(
      new Option('--matrix-share <x>', "the matrix's share of the variance in every bin").argParser(shareOption),
    )
    .addOption(
      new Option('--efficiency-sd <x>', 'relative sd of the efficiency of every column').argParser(shareOption),
    )
    .addOption(new Option('--events <n>', 'what so many more events would bring').argParser(wholeNumber(1)))
    .addOption(jsonOption())
    .action(async (bundle: string, options) => {
      const { plan } = await import('./commands/plan');
      plan(bundle, options);
    });

  entasis
    .command('open')
    .description('the desktop window')
    .argument('[study]', 'study document')
    .action(async (study: string | undefined) => {
      const { open } = await import('./commands/window');
      await open(study, surroundings);
    });

  entasis
    .command('serve')
    .description('the same window over 127.0.0.1, for a browser on this machine or through an SSH tunnel')
    .argument('[study]', 'study document')
    .addOption(new Option('--port <n>', 'port; by default a free one').argParser(wholeNumber(0)))
    .addOption(jsonOption())
    .action(async (study: string | undefined, options) => {
      const { serve } = await import('./commands/window');
      await serve(study, options, surroundings);
    });
  return entasis;
}

/** Commander throws instead of ending the process, and leaves the wording of errors to `fail`. */
function quietly(command: Command): Command {
  command.exitOverride().configureOutput({ writeErr: () => undefined });
  command.commands.forEach(quietly);
  return command;
}

function fail(error: unknown): number {
  if (error instanceof CommanderError) {
    if (error.exitCode === 0) return DONE;
    const what = error.message.replace(/^error: /, '').replaceAll('\n', ' ');
    const usage = error.code === 'commander.help' ? 'no command' : what;
    return say(new InputError('usage', usage, 'see entasis --help'));
  }
  if (error instanceof Cancelled || cancel.signal.aborted) {
    process.stderr.write('entasis: cancelled: nothing was written: start again when ready\n');
    return CANCELLED;
  }
  if (error instanceof InputError) return say(error);
  const { message, code } = error as NodeJS.ErrnoException;
  if (process.env['ENTASIS_TRACE']) console.error(error);
  return say(
    new InputError(
      code ?? 'unexpected fault',
      message,
      'report it with the study, if you can; ENTASIS_TRACE=1 shows the trace',
    ),
  );
}

function say(error: InputError): number {
  process.stderr.write(`entasis: ${error.message}\n`);
  return BAD_INPUT;
}

let interrupts = 0;
for (const signal of ['SIGINT', 'SIGTERM'] as const) {
  process.on(signal, () => {
    cancel.abort();
    // A second Ctrl-C does not wait for an orderly end.
    if (++interrupts > 1) process.exit(CANCELLED);
  });
}
// A reader that stops listening (`entasis ... | head`) is no fault.
process.stdout.on('error', (error: NodeJS.ErrnoException) => {
  if (error.code !== 'EPIPE') throw error;
});

try {
  await quietly(program()).parseAsync();
} catch (error) {
  process.exitCode = fail(error);
} finally {
  endStartedEarly();
}
