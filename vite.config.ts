import { reactRouter } from '@react-router/dev/vite'
import tailwindcss from '@tailwindcss/vite'
import { defineConfig } from 'vitest/config'

// Under vitest the router plugin must stay off: it would take over module resolution.
const underTest = process.env.VITEST !== undefined

/** Test files with a database of their own: the demo's, or that of a server that they kill. */
const OWN_DATABASE = ['tests/db/seed*.test.ts', 'tests/db/faults-database.test.ts']

/** Browser tests of permits that take minutes: too long for every run. */
const LONG_IN_A_BROWSER = ['tests/e2e/permits-live.test.ts', 'tests/e2e/permit-form.test.ts']

export default defineConfig({
  plugins: underTest ? [] : [tailwindcss(), reactRouter()],
  // Vite would otherwise pick one of its default ports and open it on every interface.
  server: { host: '127.0.0.1' },
  test: {
    environment: 'node',
    projects: [
      {
        extends: true,
        // Long for a pure test: a shared machine may be busy, and no test here is about time.
        // Pure tests have nothing to keep apart, and loading every module anew for each file takes most of their time.
        test: {
          name: 'unit',
          include: ['tests/unit/**/*.test.{ts,tsx}'],
          testTimeout: 30_000,
          isolate: false,
          maxWorkers: 2,
        },
      },
      {
        extends: true,
        test: {
          name: 'db',
          include: ['tests/db/**/*.test.ts'],
          exclude: OWN_DATABASE,
          globalSetup: ['tests/support/migrate-test-databases.ts'],
          // Each file begins with an empty database; loading the modules anew for each takes as long as the tests.
          isolate: false,
          maxWorkers: 2,
          testTimeout: 30_000,
          hookTimeout: 60_000,
        },
      },
      {
        extends: true,
        // These point the product's handle at another database, which is read once a process.
        test: {
          name: 'db-own',
          include: OWN_DATABASE,
          maxWorkers: 2,
          testTimeout: 30_000,
          hookTimeout: 60_000,
        },
      },
      {
        extends: true,
        test: {
          name: 'routes',
          include: ['tests/routes/**/*.test.ts'],
          globalSetup: ['tests/support/migrate-test-databases.ts'],
          maxWorkers: 2,
          testTimeout: 30_000,
          hookTimeout: 60_000,
        },
      },
      {
        extends: true,
        test: {
          name: 'e2e',
          include: ['tests/e2e/**/*.test.ts'],
          exclude: LONG_IN_A_BROWSER,
          globalSetup: ['tests/support/one-demo.ts'],
          // The files share one demo: none may change what another one looks at.
          maxWorkers: 2,
          testTimeout: 400_000,
          hookTimeout: 180_000,
        },
      },
      {
        extends: true,
        // Minutes of browser work: run by the soak, and by name.
        test: {
          name: 'e2e-long',
          include: LONG_IN_A_BROWSER,
          globalSetup: ['tests/support/one-demo.ts'],
          maxWorkers: 2,
          testTimeout: 400_000,
          hookTimeout: 180_000,
        },
      },
    ],
  },
})
