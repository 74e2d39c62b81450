/**
 * Runs once before the browser tests: one demo, one server for all of them, because seeding and copying fourteen months
 * takes longer than most tests. Files run one after another in the order of their names; what one changes, the next sees.
 */
import type { TestProject } from 'vitest/node'
import { startTestServer } from './server.ts'

declare module 'vitest' {
  interface ProvidedContext {
    /** Address of the web server under test. */
    demoUrl: string
    /** Address of the database that it runs on. */
    demoDatabaseUrl: string
  }
}

export default async function startOneDemo(project: TestProject): Promise<() => Promise<void>> {
  const server = await startTestServer({ database: 'ebbline_e2e' })
  project.provide('demoUrl', server.url)
  project.provide('demoDatabaseUrl', server.databaseUrl)
  return () => server.stop()
}
