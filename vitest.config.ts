import { defineConfig } from 'vitest/config';
import { assembly } from './.ci/assembly.ts';

export default defineConfig({
  plugins: [assembly()],
  test: {
    include: ['tests/**/*.test.ts'],
    reporters: ['default', './tests/closing-line.ts'],
    testTimeout: 60_000,
    hookTimeout: 120_000,
    maxWorkers: 2,
  },
});
