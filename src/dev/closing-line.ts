import type { Reporter, TestModule } from 'vitest/node';

/** Prints `N passed, N failed, N skipped` as the last line of a run, counted over test cases. */
export default class ClosingLine implements Reporter {
  onTestRunEnd(modules: readonly TestModule[], unhandled: readonly unknown[]): void {
    let passed = 0;
    let failed = unhandled.length;
    let skipped = 0;
    for (const module of modules) {
      if (module.children.size === 0 && module.state() === 'failed') failed++;
      for (const test of module.children.allTests()) {
        const state = test.result().state;
        if (state === 'passed') passed++;
        else if (state === 'failed') failed++;
        else skipped++;
      }
    }
    setTimeout(() => console.log(`${passed} passed, ${failed} failed, ${skipped} skipped`), 0);
  }
}
