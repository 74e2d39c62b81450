/** Runs once before the suites that need a database: makes one for each worker, from nothing, so that no run meets the last one's tables. */
import mysql from 'mysql2/promise'
import type { TestProject } from 'vitest/node'
import { migrateDatabase } from '#app/db/migrate.server.ts'
import { testDatabaseUrl } from './test-database-url.ts'

const made = globalThis as typeof globalThis & { __testDatabases?: Map<number, Promise<void>> }

export default async function migrateTestDatabases(project: TestProject): Promise<void> {
  const workers = Number(project.config.maxWorkers)
  // Two projects of one run share their workers' databases: each is made once.
  made.__testDatabases ??= new Map()
  const all: Promise<void>[] = []
  for (let worker = 1; worker <= workers; worker += 1) {
    const begun = made.__testDatabases.get(worker) ?? recreate(testDatabaseUrl(worker))
    made.__testDatabases.set(worker, begun)
    all.push(begun)
  }
  await Promise.all(all)
}

async function recreate(databaseUrl: string): Promise<void> {
  const url = new URL(databaseUrl)
  const connection = await mysql.createConnection({
    host: url.hostname,
    port: Number(url.port || 3306),
    user: decodeURIComponent(url.username),
    password: decodeURIComponent(url.password),
  })
  try {
    await connection.query(`DROP DATABASE IF EXISTS \`${url.pathname.slice(1)}\``)
  } finally {
    await connection.end()
  }
  await migrateDatabase(databaseUrl)
}
