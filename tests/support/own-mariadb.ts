/** A database server of one's own, as the product starts it: for benches, and for tests that kill it. */
import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { Program } from './programs.ts'
import { launcher } from './programs.ts'

export interface OwnMariadb {
  /** Address of a database on it, which changes with every start. */
  url(database: string): string
  /** kill -9. */
  kill(): Promise<void>
  /** Starts it again on the same files. */
  restart(): Promise<void>
  /** Stops it and removes its files. */
  end(): Promise<void>
}

interface Started {
  program: Program
  url(name: string): string
  stop(): Promise<void>
}

/**
 * Starts a server with the product's own settings for durability, so that what it has confirmed outlives a kill.
 *
 * @param options further options of mariadbd
 */
export async function startOwnMariadb(options: readonly string[]): Promise<OwnMariadb> {
  const { startMariadb } = await launcher<{
    startMariadb(settings: {
      folder: string
      user: unknown
      password: string
      options: readonly string[]
    }): Promise<Started>
  }>('mariadb.mjs')
  const { databaseUser } = await launcher<{ databaseUser(): unknown }>('database-user.mjs')
  const folder = mkdtempSync(join(tmpdir(), 'ebbline-own-'))
  const start = () =>
    startMariadb({
      folder,
      user: databaseUser(),
      password: 'onlyfortests',
      options,
    })
  let server = await start()
  return {
    url: (database) => server.url(database),
    async kill() {
      server.program.child.kill('SIGKILL')
      await server.program.ended
    },
    async restart() {
      server = await start()
    },
    async end() {
      await server.stop()
      rmSync(folder, { recursive: true, force: true })
    },
  }
}
