import { defineConfig } from 'vitest/config';

// Tests that drive the real command run the compiled build: `npm test` builds first.
export default defineConfig({
  test: {
    include: ['tests/**/*.test.ts'],
    testTimeout: 60_000,
    hookTimeout: 60_000,
  },
});
