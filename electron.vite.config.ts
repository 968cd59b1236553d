import { resolve } from 'node:path';
import { svelte } from '@sveltejs/vite-plugin-svelte';
import { defineConfig } from 'electron-vite';

const here = import.meta.dirname;

export default defineConfig({
  main: {
    build: {
      target: 'node20',
      // Bundled, because a start of the command line would else read hundreds of small files.
      externalizeDeps: { exclude: ['zod', 'commander', 'tinyglobby', 'arquero', '@uwdata/flechette', 'acorn', 'fdir', 'picomatch'] },
      rolldownOptions: {
        input: {
          command: resolve(here, 'main/command.ts'),
          'read-worker': resolve(here, 'main/workers/read-worker.ts'),
          'draw-worker': resolve(here, 'main/workers/draw-worker.ts'),
        },
      },
    },
  },
});
void svelte;
