import { defineConfig } from 'vitest/config';

// Tests that drive the real command run the compiled build: `npm test` builds first.
export default defineConfig({
  test: {
    include: ['tests/**/*.test.ts'],
    testTimeout: 60_000,
    hookTimeout: 60_000,
    // All cores: half of the tests wait for commands that they started.
    maxWorkers: '100%',
  },
});
