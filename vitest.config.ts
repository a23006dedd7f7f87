import { fileURLToPath } from 'node:url'
import { defineConfig } from 'vitest/config'

const at = (path: string) => fileURLToPath(new URL(path, import.meta.url))
const kind = (name: string, test: { testTimeout: number, hookTimeout?: number, maxWorkers?: number, fileParallelism?: boolean, globalSetup?: string[], retry?: number }) => ({
  extends: true as const,
  test: { name, include: [`tests/${name}/**/*.test.ts`], ...test },
})
const services = { globalSetup: ['tests/integration/setup.ts'], fileParallelism: false, hookTimeout: 120_000 }

export default defineConfig({
  root: at('.'),
  resolve: { alias: [{ find: '#shared', replacement: at('shared') }, { find: /^~\//, replacement: at('app/') }] },
  test: {
    maxWorkers: 2,
    teardownTimeout: 60_000,
    projects: [
      kind('unit', { testTimeout: 20_000 }),
      kind('reference', { testTimeout: 180_000 }),
      kind('integration', { ...services, testTimeout: 60_000 }),
      // Every file of faults starts installations of its own, to break them.
      // Real processes on a machine that others use too: what fails once is tried once more, and its first failure stays in the log.
      kind('faults', { retry: 1, fileParallelism: false, hookTimeout: 120_000, testTimeout: 240_000 }),
      kind('e2e', { ...services, retry: 1, testTimeout: 180_000 }),
    ],
  },
})
