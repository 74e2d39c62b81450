import { eq } from 'drizzle-orm'
import { RouterContextProvider } from 'react-router'
import { beforeEach, describe, expect, it } from 'vitest'
import { actorContext, nowContext } from '#app/context.ts'
import { apiToken, record } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { newTokenSchema } from '#app/domain/schemas/api-token.ts'
import { action } from '#app/routes/api/tokens.tsx'
import {
  addToken,
  ensureDemoToken,
  readTokens,
  revokeToken,
  tokenFor,
} from '#app/services/api-tokens.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const UNTIL = new Date('2026-12-01T00:00:00Z')
let admin: Actor

beforeEach(async () => {
  await createSite(db)
  admin = await createUser(db, { roles: ['administrator'] })
  await createSource(db, { code: 'NL-T' })
  await createSource(db, { code: 'NL-P' })
})

function add(options: { sources?: string[]; until?: Date } = {}) {
  return addToken(db, admin, MORNING, {
    intent: 'add',
    name: 'Gateway in the cellar',
    sources: options.sources ?? ['NL-T'],
    until: options.until ?? UNTIL,
    reason: 'five-minute feed',
  })
}

const bearer = (token: string) => `Bearer ${token}`

describe('a token', () => {
  it('is shown once and kept as a hash only', async () => {
    const token = await add()
    expect(token).toMatch(/^ebb_[A-Za-z0-9_-]{43}$/)
    const [row] = await db.select().from(apiToken)
    expect(row?.tokenHash).toMatch(/^[0-9a-f]{64}$/)
    const acts = await db.select().from(record).where(eq(record.subjectKind, 'api-token'))
    expect(acts).toHaveLength(1)
    expect(JSON.stringify([row, acts])).not.toContain(token.slice(4))
  })

  it('lets its sources in and no other', async () => {
    const token = await add()
    expect(await tokenFor(db, bearer(token), 'NL-T', MORNING)).toMatchObject({ sources: ['NL-T'] })
    await expect(tokenFor(db, bearer(token), 'NL-P', MORNING)).rejects.toMatchObject({ code: 'forbidden' })
  })

  it.each([[null], ['Bearer'], ['Bearer ebb_wrong'], ['Basic abc'], ['Bearer a b'], ["Bearer ' OR 1=1"]])(
    'is asked for: %s',
    async (header) => {
      await expect(tokenFor(db, header, 'NL-T', MORNING)).rejects.toMatchObject({ status: 401 })
    },
  )

  it('ends with its last day', async () => {
    const token = await add()
    await expect(tokenFor(db, bearer(token), 'NL-T', UNTIL)).rejects.toMatchObject({
      status: 401,
      message: expect.stringContaining('has ended'),
    })
  })

  it('is revoked once, with who and why', async () => {
    const token = await add()
    const [listed] = (await readTokens(db, admin, MORNING)).tokens
    const now = after(MORNING, 60)
    const revoked = { tokenId: listed?.id ?? 0, reason: 'gateway exchanged' }
    expect(await revokeToken(db, admin, now, revoked)).toBe('Gateway in the cellar')
    await expect(tokenFor(db, bearer(token), 'NL-T', now)).rejects.toMatchObject({ status: 401 })
    await expect(revokeToken(db, admin, now, revoked)).rejects.toMatchObject({ code: 'conflict' })
    expect((await readTokens(db, admin, now)).tokens).toMatchObject([
      { standing: 'revoked', revokedBy: admin.name, revokeReason: 'gateway exchanged' },
    ])
  })

  it('is made for a source there is and a day to come', async () => {
    await expect(add({ sources: ['NL-X'] })).rejects.toMatchObject({
      fields: { sources: [expect.any(String)] },
    })
    await expect(add({ until: MORNING })).rejects.toMatchObject({ fields: { until: [expect.any(String)] } })
    await expect(add({ until: new Date('2030-01-01') })).rejects.toMatchObject({ code: 'bad-input' })
    expect(await db.select().from(apiToken)).toEqual([])
  })

  it('is the administrators’ business', async () => {
    admin = await createUser(db, { roles: ['engineer', 'safety-officer', 'manager'] })
    await expect(add()).rejects.toMatchObject({ code: 'forbidden' })
    await expect(readTokens(db, admin, MORNING)).rejects.toMatchObject({ code: 'forbidden' })
    await expect(revokeToken(db, admin, MORNING, { tokenId: 1, reason: 'why not' })).rejects.toMatchObject({
      code: 'forbidden',
    })
  })
})

describe('the form', () => {
  const schema = newTokenSchema('Europe/Berlin')
  const form = { intent: 'add', name: 'Gateway', sources: ['NL-T'], until: '2026-11-30', reason: 'live feed' }

  it('takes a last day in full', () => {
    expect(schema.parse(form).until).toEqual(new Date('2026-11-30T23:00:00Z'))
  })

  it.each([
    ['until', ''],
    ['sources', []],
    ['name', 'x'],
    ['reason', ''],
  ] as const)('asks for %s', (field, value) => {
    const parsed = schema.safeParse({ ...form, [field]: value })
    expect(parsed.error?.issues.map(({ path }) => path[0])).toEqual([field])
  })
})

describe('the token of the demo', () => {
  const demo = { token: 'f'.repeat(64), name: 'Feeder', sources: ['NL-T', 'NL-P'], endsAt: UNTIL }

  it('is made known once and stays revoked when it was', async () => {
    await ensureDemoToken(db, MORNING, demo)
    await ensureDemoToken(db, MORNING, demo)
    const [token, ...more] = (await readTokens(db, admin, MORNING)).tokens
    expect(more).toEqual([])
    expect(token?.sources).toEqual(['NL-P', 'NL-T'])
    await revokeToken(db, admin, MORNING, { tokenId: token?.id ?? 0, reason: 'to see what happens' })
    await ensureDemoToken(db, MORNING, demo)
    await expect(tokenFor(db, bearer(demo.token), 'NL-T', MORNING)).rejects.toMatchObject({ status: 401 })
  })
})

describe('the page', () => {
  async function send(form: Record<string, string | string[]>) {
    const context = new RouterContextProvider()
    context.set(actorContext, admin)
    context.set(nowContext, MORNING)
    const body = new URLSearchParams(
      Object.entries(form).flatMap(([name, value]) =>
        [value].flat().map((one): [string, string] => [name, one]),
      ),
    )
    const request = new Request('http://ebbline.test/people/tokens', { method: 'POST', body })
    const { url } = request
    const args = { context, request, url: new URL(url), pattern: '/people/tokens', params: {} }
    return action(args as Parameters<typeof action>[0])
  }
  const wanted = { intent: 'add', name: 'Gateway', until: '2026-11-30', reason: 'live feed' }

  it('shows the token it made, for every source that was ticked', async () => {
    const answer = await send({ ...wanted, sources: ['NL-T', 'NL-P'] })
    if (!('token' in answer)) throw new Error(JSON.stringify(answer))
    for (const code of ['NL-T', 'NL-P'])
      expect(await tokenFor(db, bearer(answer.token), code, MORNING)).toMatchObject({ name: 'Gateway' })
  })

  it('says what is wrong, keeps what was typed, and revokes with a redirect', async () => {
    expect(await send(wanted)).toMatchObject({
      init: { status: 400 },
      data: {
        ok: false,
        intent: 'add',
        fields: { sources: [expect.any(String)] },
        typed: { name: 'Gateway' },
      },
    })
    await add()
    const [row] = await db.select().from(apiToken)
    const answer = await send({ intent: 'revoke', tokenId: String(row?.id), reason: 'lost laptop' })
    expect(answer).toMatchObject({ status: 302 })
    expect((await readTokens(db, admin, MORNING)).tokens).toMatchObject([{ standing: 'revoked' }])
  })
})
