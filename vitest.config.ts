// How are the tests run?

import { defineConfig } from 'vitest/config';

export default defineConfig({
  test: {
    environment: 'node',
    include: ['test/**/*.test.ts'],
    // Benchmarks and the long validation are scripts of their own: `npm run bench`, `npm run validate`.
    exclude: ['test/bench/**', 'test/validate/**', '**/node_modules/**', '**/dist/**'],
    // Processes, not threads: each file gets its own heap, so a large factorization cannot starve its neighbour.
    pool: 'forks',
    // The project promises its times on two cores.
    maxWorkers: 2,
    // A whole solve takes seconds on a slow machine; a test that needs longer says so itself.
    testTimeout: 180_000,
    hookTimeout: 240_000,
    teardownTimeout: 10_000,
  },
});
