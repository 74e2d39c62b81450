import { count } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { reading } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { findRoundedCopy } from '#app/services/intake-copy.server.ts'
import { acceptImport, discardImport } from '#app/services/intake-decisions.server.ts'
import { originalFile, readImportPage } from '#app/services/intake-pages.server.ts'
import { NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { fixture } from '#tests/fixtures/night-files/read.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
let technician: Actor

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  const west = await createSource(db, { code: 'NL-W', profile: NL_W, profileVersion: 1 })
  for (const name of ['HC-01A', 'HC-01B', 'CC-01']) await createChannel(db, { sourceId: west.id, name })
})

async function upload(text: string) {
  const bytes = new TextEncoder().encode(text)
  async function* stream() {
    yield bytes
  }
  return stageUpload(db, technician, MORNING, {
    sourceCode: 'NL-W',
    fileName: 'NL-W.csv',
    stream: stream(),
    statedBytes: bytes.length,
    limitBytes: 1 << 20,
  })
}

/** The night with a third digit everywhere, so that there is something to round away. */
const night = () =>
  new TextDecoder()
    .decode(fixture('nl-w-night.csv'))
    .replace(/(\d,\d)E/g, (_, digits: string) => `${digits}7E`)
const rounded = (text: string) => text.replace(/(\d,\d)7E/g, '$1E')
/** As a spreadsheet saves it: no line with the unit, month before day, no seconds. */
const spreadsheet = (text: string) =>
  rounded(text)
    .split(/\r?\n/)
    .filter((line) => !line.startsWith('#'))
    .map((line) => line.replace(/^(\d\d)\.(\d\d)\.(\d{4}) (\d\d:\d\d):\d\d/, '$2/$1/$3 $4'))
    .join('\n')

describe('a file that holds stored readings with fewer digits', () => {
  beforeEach(async () => {
    const { importId } = await upload(night())
    await acceptImport(db, technician, MORNING, importId)
  })

  it('is recognised, with three pairs to show, and nothing is stored for it', async () => {
    const before = await db.select({ n: count() }).from(reading)
    const { importId, state } = await upload(rounded(night()))
    expect(state).toBe('read')
    const finding = await findRoundedCopy(db, importId)
    expect(finding).toMatchObject({ kind: 'rounded-copy', digits: 2 })
    expect(finding?.examples).toHaveLength(3)
    expect(await db.select({ n: count() }).from(reading)).toEqual(before)
  })

  it('is recognised also after a spreadsheet has lost its unit and turned its dates', async () => {
    const { importId, state } = await upload(spreadsheet(night()))
    expect(state).toBe('refused')
    expect(await findRoundedCopy(db, importId)).toMatchObject({ kind: 'rounded-copy' })
  })

  it('is said on its page, whether it could be read or not', async () => {
    for (const text of [rounded(night()), spreadsheet(night())]) {
      const { importId } = await upload(text)
      const { copy } = await readImportPage(db, technician, importId)
      expect(copy).toContain('fewer digits')
    }
    const finer = await upload(night().replace(/7E/g, '71E'))
    expect((await readImportPage(db, technician, finer.importId)).copy).toBeNull()
  })

  it('is none when the values are others', async () => {
    const { importId } = await upload(rounded(night()).replace(/(\d),(\d)E/g, '$2,$1E'))
    expect(await findRoundedCopy(db, importId)).toBeNull()
  })

  it('is none in an import that does not exist', async () => {
    await expect(findRoundedCopy(db, 4711)).rejects.toMatchObject({ code: 'not-found' })
  })
})

describe('a file that came before under the same name', () => {
  const cut = () => night().slice(0, 2000)
  const earlierOf = async (importId: number) => (await readImportPage(db, technician, importId)).earlier

  it('and was cut then is named, also after it was taken in', async () => {
    const first = await upload(cut())
    const second = await upload(night())
    const size = new TextEncoder().encode(cut()).length
    expect(await earlierOf(second.importId)).toEqual({
      importId: first.importId,
      state: 'read',
      byteSize: size,
      uploadedAt: MORNING,
      relation: 'begins',
    })
    await acceptImport(db, technician, MORNING, first.importId)
    expect(await earlierOf(second.importId)).toMatchObject({ state: 'accepted', relation: 'begins' })
    // What the cut file brought is left alone, the rest is added.
    const { stored, held } = await acceptImport(db, technician, MORNING, second.importId)
    expect(held).toBeGreaterThan(100)
    expect(stored + held).toBe(435)
  })

  it('and is whole is named where this one was cut, and kept beside it', async () => {
    const whole = await upload(night())
    const { importId } = await upload(cut())
    expect(await earlierOf(importId)).toMatchObject({ importId: whole.importId, relation: 'whole' })
    await discardImport(db, technician, MORNING, importId, 'cut on its way')
    expect(await earlierOf(whole.importId)).toBeNull()
    const { byteSize, body } = await originalFile(db, technician, importId)
    expect((await new Response(body).arrayBuffer()).byteLength).toBe(byteSize)
  })

  it('and holds something else is named as such', async () => {
    const first = await upload(night())
    const { importId } = await upload(night().replace(/08\.11\.2026/g, '07.11.2026'))
    expect(await earlierOf(importId)).toMatchObject({ importId: first.importId, relation: 'other' })
  })
})
