import type { Reporter, TestModule } from 'vitest/node';

/** Prints `N passed, N failed, N skipped` alone on the last line, the form that continuous integration reads. */
export default class ClosingLine implements Reporter {
  onTestRunEnd(modules: readonly TestModule[]): void {
    const seen = { passed: 0, failed: 0, skipped: 0 };
    for (const module of modules) {
      for (const test of module.children.allTests()) {
        const { state } = test.result();
        if (state !== 'pending') seen[state] += 1;
      }
      if (module.state() === 'failed' && seen.failed === 0) seen.failed = 1;
    }
    console.log(`\n${seen.passed} passed, ${seen.failed} failed, ${seen.skipped} skipped`);
  }
}
