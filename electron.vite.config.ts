import { resolve } from 'node:path';
import { svelte } from '@sveltejs/vite-plugin-svelte';
import { defineConfig } from 'electron-vite';

const here = import.meta.dirname;

export default defineConfig({
  main: {
    build: {
      target: 'node20',
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
