import { beforeEach, describe, expect, it } from 'vitest'
import type { Actor } from '#app/domain/actor.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { acceptImport } from '#app/services/intake-decisions.server.ts'
import { type NightRow, readIntakePage } from '#app/services/intake-pages.server.ts'
import { agreeWithdrawal, askWithdrawal, withdrawImport } from '#app/services/intake-withdrawal.server.ts'
import { NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { fixture } from '#tests/fixtures/night-files/read.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const SIGN_IN_PAGE = '<!doctype html><html><body><form>Please sign in</form></body></html>'
let technician: Actor

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  const west = await createSource(db, { code: 'NL-W', dueAt: '07:00', profile: NL_W, profileVersion: 1 })
  for (const name of ['HC-01A', 'HC-01B', 'CC-01']) await createChannel(db, { sourceId: west.id, name })
})

function send(bytes: Uint8Array | string, options: { at?: Date; largeBytes?: number } = {}) {
  async function* stream() {
    yield typeof bytes === 'string' ? new TextEncoder().encode(bytes) : bytes
  }
  return stageUpload(db, technician, options.at ?? MORNING, {
    sourceCode: 'NL-W',
    fileName: 'NL-W_2026-11-08.csv',
    stream: stream(),
    statedBytes: null,
    limitBytes: 2 ** 26,
    largeBytes: options.largeBytes,
  })
}

/** The last nights of the only source, the newest first. */
async function nights(): Promise<NightRow[]> {
  return (await readIntakePage(db, technician, MORNING)).nights
}

describe('the nights that are due', () => {
  it('has a source that never sent anything stand apart', async () => {
    expect((await nights()).map(({ state }) => state)).toEqual(['silent', 'silent', 'silent'])
  })

  it('does not take a saved sign-in page for data: it came, was refused, and the night still owes a file', async () => {
    const { importId, state } = await send(SIGN_IN_PAGE)
    expect(state).toBe('refused')
    const [newest, ...older] = await nights()
    expect(newest).toMatchObject({
      night: '2026-11-08',
      state: 'refused',
      file: { importId, by: 'Tilda Weir' },
    })
    expect(older.map(({ state }) => state)).toEqual(['missing', 'missing'])
  })

  it('counts what was refused for the night that was over when it came', async () => {
    await send(SIGN_IN_PAGE, { at: after(MORNING, -86_400) })
    expect((await nights()).map(({ night, state }) => [night, state])).toEqual([
      ['2026-11-08', 'missing'],
      ['2026-11-07', 'refused'],
      ['2026-11-06', 'missing'],
    ])
  })

  it('shows the good file once it comes, whatever was refused before', async () => {
    await send(SIGN_IN_PAGE)
    const { importId } = await send(fixture('nl-w-night.csv'))
    expect((await nights())[0]).toMatchObject({ state: 'waiting', file: { importId } })
    await acceptImport(db, technician, MORNING, importId)
    expect((await nights())[0]).toMatchObject({ state: 'taken-in', file: { importId } })
  })

  it('shows that the worker reads a large file', async () => {
    const { importId } = await send(fixture('nl-w-night.csv'), { largeBytes: 100 })
    expect((await nights())[0]).toMatchObject({ state: 'reading', file: { importId } })
  })

  it('owes a file again when the import of the night was withdrawn', async () => {
    const { importId } = await send(fixture('nl-w-night.csv'))
    await acceptImport(db, technician, MORNING, importId)
    await askWithdrawal(db, technician, MORNING, importId, 'wrong gauge')
    const page = () => readIntakePage(db, technician, MORNING)
    expect((await page()).files[0]).toMatchObject({ id: importId, wish: 'asked' })
    await agreeWithdrawal(db, await createUser(db, { roles: ['engineer'] }), MORNING, importId)
    expect((await page()).files[0]).toMatchObject({ wish: 'agreed' })
    await withdrawImport(db, await createUser(db, { roles: ['administrator'] }), MORNING, importId)
    expect((await page()).files[0]).toMatchObject({ state: 'withdrawn', wish: null })
    expect((await nights())[0]?.state).toBe('missing')
  })
})
