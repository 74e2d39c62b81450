import { eq } from 'drizzle-orm'
import { expect, test } from 'vitest'
import { adoptedThreshold, person, signedAct } from '#app/db/schema/index.ts'
import { THRESHOLD_KEYS, THRESHOLDS, thresholdStanding } from '#app/domain/hazard-thresholds.ts'
import { openAdoptions, readBayVolume } from '#app/services/thresholds.server.ts'
import { at, DEMO_START } from '#seeds/demo-time.ts'
import { PERSON_ID } from '#seeds/people.ts'
import { seedThresholds } from '#seeds/thresholds.ts'
import { freshDatabase } from '#tests/support/db.ts'

const db = freshDatabase()

test('the demo’s site has adopted every threshold, signed, and none lapses while its permits run', async () => {
  await db.insert(person).values({ id: PERSON_ID.ione, name: 'Ione Castellbrook', createdAt: DEMO_START })
  expect(await seedThresholds(db)).toBe(16)
  const open = await openAdoptions(db)
  expect(open.map(({ key }) => key).sort()).toEqual([...THRESHOLD_KEYS].sort())
  // The newest permit of the demo asks for a window until then.
  const lastWindow = at('2026-11-25 18:00')
  for (const one of open) {
    const { least, most, unit } = THRESHOLDS[one.key]
    expect(one.value, one.key).toBeGreaterThanOrEqual(least)
    expect(one.value, one.key).toBeLessThanOrEqual(most)
    expect(one.unit, one.key).toBe(unit)
    expect(one.at.getTime(), one.key).toBeLessThan(DEMO_START.getTime())
    expect(thresholdStanding(one, lastWindow), one.key).toBe('in-force')
  }
  const signatures = await db
    .select({ by: signedAct.personId, about: signedAct.subjectId, key: adoptedThreshold.thresholdKey })
    .from(adoptedThreshold)
    .innerJoin(signedAct, eq(signedAct.id, adoptedThreshold.signedActId))
  expect(signatures).toHaveLength(16)
  for (const { by, about, key } of signatures) {
    expect(by).toBe(PERSON_ID.ione)
    expect(about).toBe(key)
  }
  expect(await readBayVolume(db)).toMatchObject({ volumeM3: 1440, basis: 'size set by the site' })
})
