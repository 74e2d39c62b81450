/** The demo's permits on paper and in the database that the demo is seeded into. */
import { getDocument } from 'pdfjs-dist/legacy/build/pdf.mjs'
import { create as createQr } from 'qrcode'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { closeDb, type Db, getDb, getPool } from '#app/db/client.server.ts'
import { findPermit } from '#app/db/queries/permits.server.ts'
import type { Actor } from '#app/domain/actor.ts'
import { permitOfCode, readPermitPaper, readPermitPdf } from '#app/services/permit-paper.server.ts'
import { seededDemo } from '../support/demo-database.ts'

const MORNING = new Date('2026-11-09T07:00:00.000Z')
const ORIGIN = 'https://ebbline.example/'
const PIM: Actor = { personId: 2, name: 'Pim Larkspur', roles: ['technician'] }

let db: Db

beforeAll(async () => {
  process.env.DATABASE_URL = await seededDemo()
  process.env.SESSION_SECRET ??= 'a secret for tests only, 32 or more'
  process.env.LOG_LEVEL ??= 'silent'
  db = getDb()
}, 600_000)
afterAll(closeDb)

async function pagesOf(number: string, now = MORNING): Promise<string[]> {
  const file = await readPermitPdf(db, PIM, now, number, ORIGIN)
  const pdf = await getDocument({ data: new Uint8Array(file), useSystemFonts: false }).promise
  const pages: string[] = []
  for (let page = 1; page <= pdf.numPages; page += 1) {
    const { items } = await (await pdf.getPage(page)).getTextContent()
    pages.push(items.map((item) => ('str' in item ? item.str : '')).join(' '))
  }
  return pages
}

async function count(query: string): Promise<number> {
  const [rows] = await getPool().promise().query(query)
  return Number((rows as { n: unknown }[])[0]?.n)
}

describe('the posted copy of HSP-2026-031', () => {
  it('has its six lock numbers, the window with offsets and how long it is live, in the order of the points', async () => {
    const text = (await pagesOf('HSP-2026-031')).join(' ').replaceAll(/\s+/g, ' ')
    const locks = [...text.matchAll(/\bL-\d{3}\b/g)].map(([lock]) => lock)
    expect(locks).toEqual(['L-114', 'L-115', 'L-116', 'L-117', 'L-118', 'L-119'])
    expect(text).toContain('2026-11-04 06:00 (UTC+01:00) to 2026-11-13 18:00 (UTC+01:00), 228 hours')
    expect(text).toContain('Live until 2026-11-09 18:00 (UTC+01:00)')
    expect(text).toContain('Pim Larkspur')
    expect(text).not.toMatch(/NOT A PERMIT|NOT LIVE|SUSPENDED|NOT LOCKED|NOT VERIFIED/)
    // Soak since 2026-11-05 09:12: on the fourth of seven days.
    expect(text).toContain('day 4 of 7')
    expect(text).toContain('NO ENTRY 590 m to 760 m')
    expect(text).toContain('Wendel Quarrie, witnessed by Odalys Fennimore')
  })

  it('leads back by a code that holds the address under which people reach the site', async () => {
    const permit = await findPermit(db, 'HSP-2026-031')
    const { frame } = await readPermitPaper(db, PIM, MORNING, 'HSP-2026-031', ORIGIN)
    expect(frame.address).toBe(`https://ebbline.example/p/${permit?.shortCode}`)
    const { modules, segments } = createQr(frame.address, { errorCorrectionLevel: 'M' })
    // Bytes, and letters and figures where the code may be written shorter.
    const encoded = segments.map(({ data }) =>
      typeof data === 'string' ? data : Buffer.from(data as Uint8Array),
    )
    expect(encoded.join('')).toBe(frame.address)
    const side = frame.qr.width / modules.size
    const dark = frame.qr.shapes.reduce(
      (sum, shape) => sum + (shape.kind === 'rect' ? (shape.width * shape.height) / side ** 2 : 0),
      0,
    )
    expect(dark).toBeCloseTo(
      modules.data.reduce((sum: number, module) => sum + (module === 0 ? 0 : 1), 0),
      6,
    )
    expect(await permitOfCode(db, permit?.shortCode.toLowerCase() ?? '')).toBe('HSP-2026-031')
    await expect(permitOfCode(db, 'NOSUCH')).rejects.toMatchObject({ code: 'not-found' })
  })

  it('says that it has run out a second after nobody has revalidated it', async () => {
    const [before] = await pagesOf('HSP-2026-031', new Date('2026-11-09T16:59:59.000Z'))
    const [after] = await pagesOf('HSP-2026-031', new Date('2026-11-09T17:00:00.000Z'))
    expect(before).toContain('Live until')
    expect(after).toContain('EXPIRED: NOT LIVE')
  })
})

describe('other permits on paper', () => {
  it('say in large letters what they are not', async () => {
    for (const [number, letters] of [
      ['HSP-2026-032', 'REQUESTED: NOT A PERMIT'],
      ['HSP-2026-033', 'DRAFT: NOT A PERMIT'],
      ['HSP-2026-028', 'REFUSED: NOT A PERMIT'],
      ['HSP-2026-029', 'CANCELLED: NOT LIVE'],
      ['HSP-2026-022', 'LAPSED: NOT A PERMIT'],
    ] as const) {
      for (const page of await pagesOf(number)) expect(page, number).toContain(letters)
    }
  })

  it('list L-109 at the output of HX-2 for HSP-2026-030, which cools', async () => {
    const text = (await pagesOf('HSP-2026-030')).join(' ').replaceAll(/\s+/g, ' ')
    expect(text).toMatch(/Output of HX-2 .{0,80}L-109/)
    expect(text).toContain('Cooling: heating off since 2026-11-08 23:30 (UTC+01:00)')
    expect(text).toContain('2026-11-10 18:00 (UTC+01:00)')
  })

  it('are refused by a number that does not exist', async () => {
    await expect(readPermitPdf(db, PIM, MORNING, 'HSP-1999-001', ORIGIN)).rejects.toMatchObject({
      code: 'not-found',
    })
  })
})

describe('the seeded tables of permits', () => {
  it('hold 41 permits, four stopped once, one that ran out live, and the locks of two', async () => {
    expect(await count('SELECT COUNT(*) AS n FROM permit')).toBe(41)
    expect(await count("SELECT COUNT(*) AS n FROM permit_act WHERE act = 'suspend'")).toBe(4)
    expect(await count("SELECT COUNT(DISTINCT permit_id) AS n FROM permit_act WHERE act = 'suspend'")).toBe(4)
    expect(await count("SELECT COUNT(*) AS n FROM permit_act WHERE act = 'expire'")).toBe(1)
    expect(await count('SELECT COUNT(*) AS n FROM lock_in_use')).toBe(12)
    expect(
      await count(
        'SELECT COUNT(*) AS n FROM isolation_point p LEFT JOIN lock_in_use u ON u.point_id = p.id WHERE (p.removed_at IS NULL) <> (u.lock_number IS NOT NULL)',
      ),
    ).toBe(0)
  })

  it('leave no danger open, and link the permits of bakes to their plans', async () => {
    expect(
      await count('SELECT COUNT(*) AS n FROM safety_event WHERE permit_id IS NOT NULL AND ended_at IS NULL'),
    ).toBe(0)
    // Five bakes of one segment have a plan, and the pair of two segments that is asked for.
    const linked = await count(
      'SELECT COUNT(*) AS n FROM permit t JOIN bake_plan b ON b.id = t.plan_id JOIN bake_plan_segment s ON s.plan_id = b.id JOIN permit_segment g ON g.permit_id = t.id AND g.segment_id = s.segment_id',
    )
    expect(linked).toBe(7)
  })
})
