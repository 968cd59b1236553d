import { resolve } from 'node:path';
import { svelte } from '@sveltejs/vite-plugin-svelte';
import { defineConfig } from 'electron-vite';
import { assembly } from './.ci/assembly.ts';

const at = (path: string): string => resolve(import.meta.dirname, path);
const worker = (name: string): string => at(`main/workers/${name}-worker.ts`);

const STDLIB = [
  'stats-base-dists-beta-cdf',
  'math-base-special-betaincinv',
  'math-base-special-erfc',
  'math-base-special-erfcinv',
  'math-base-special-gammaln',
].map((name) => `@stdlib/${name}`);
/** Packages built into the program, with what they import. */
const BUNDLED = [
  'zod',
  'commander',
  'tinyglobby',
  'fdir',
  'picomatch',
  'arquero',
  '@uwdata/flechette',
  'acorn',
  'fzstd',
  'yauzl',
  'pend',
  '@duckdb/node-api',
  ...STDLIB,
];

export default defineConfig({
  main: {
    plugins: [assembly()],
    build: {
      target: 'node20',
      // Bundled, because a start of the command line would else read hundreds of small files.
      externalizeDeps: { exclude: BUNDLED },
      rolldownOptions: {
        input: {
          command: at('main/command.ts'),
          desktop: at('main/desktop.ts'),
          library: at('src/library.ts'),
          'read-worker': worker('read'),
          'draw-worker': worker('draw'),
          'matrix-worker': worker('matrix'),
          'inspect-worker': worker('inspect'),
        },
      },
    },
  },
  preload: {
    build: {
      // A sandboxed preload script is CommonJS and can require no package.
      externalizeDeps: false,
      rolldownOptions: {
        input: { preload: at('main/preload.ts') },
        output: { format: 'cjs', entryFileNames: '[name].cjs' },
      },
    },
  },
  renderer: {
    root: at('renderer'),
    plugins: [svelte()],
    build: {
      // The page's policy takes files only: nothing small is put in line.
      assetsInlineLimit: 0,
      rolldownOptions: { input: at('renderer/index.html') },
    },
  },
});
