/**
 * Isolation tests of the demo, fitted by the product's own code from the demo's own readings. SG-16 was isolated too,
 * but nobody has recorded its test yet; the one of SG-13 still goes on.
 */
import { eq } from 'drizzle-orm'
import type { DbOrTx } from '../../app/db/client.server.ts'
import { insertIsolationTest } from '../../app/db/queries/isolation-tests.server.ts'
import { isolationTest, signedAct } from '../../app/db/schema/index.ts'
import { usualWindow } from '../../app/domain/isolation-tests.ts'
import { fitWindow, readSubject } from '../../app/services/isolation-tests-fit.server.ts'
import { at } from '../demo-time.ts'
import { PERSON_ID, type PersonKey } from '../people.ts'
import { ISOLATIONS } from '../scenario/events.ts'

interface DemoTest {
  segment: string
  recordedBy: PersonKey
  recorded: string
  note: string
  accepted: { at: string; remark: string } | null
  voided: { at: string; remark: string } | null
}

const TESTS: readonly DemoTest[] = [
  {
    segment: 'SG-15',
    recordedBy: 'odalys',
    recorded: '2025-11-13 08:40',
    note: 'PV-15, GV-14 and GV-15 seen shut.',
    accepted: {
      at: '2025-11-13 10:15',
      remark: 'Straight and within the limit; argon flat, so it is hydrogen.',
    },
    voided: null,
  },
  {
    segment: 'SG-06',
    recordedBy: 'pim',
    recorded: '2026-02-14 09:30',
    note: 'All valves of the segment seen shut before.',
    accepted: { at: '2026-02-16 07:50', remark: 'Within the limit after the bake, no argon.' },
    voided: null,
  },
  {
    segment: 'SG-10',
    recordedBy: 'nerys',
    recorded: '2026-09-17 08:30',
    note: '',
    accepted: {
      at: '2026-09-17 11:05',
      remark: 'The new weld holds: straight, within the limit, argon flat.',
    },
    voided: null,
  },
  {
    segment: 'SG-11',
    recordedBy: 'pim',
    recorded: '2026-10-21 08:00',
    note: 'On the cart until the evening; PV-11 seen shut.',
    accepted: { at: '2026-10-21 09:30', remark: 'No leak to be seen beside what an unbaked wall gives.' },
    voided: {
      at: '2026-10-28 13:20',
      remark:
        'The filament of HC-11B came on at 23:40, in the middle of the test; the step in the curve is the gauge, not the tube.',
    },
  },
  {
    segment: 'SG-12',
    recordedBy: 'nerys',
    recorded: '2026-10-30 08:10',
    note: 'GV-11 and GV-12 seen shut. Residual gas: 2 alone, 40 flat.',
    accepted: {
      at: '2026-10-30 14:00',
      remark:
        'Above the limit of a fresh bake, straight and without argon: hydrogen of steel last baked in 2016. That is what the bake is for; no leak.',
    },
    voided: null,
  },
]

/** Records the tests as they were recorded at the time. */
export async function seedIsolationTests(db: DbOrTx): Promise<number> {
  for (const one of TESTS) {
    const isolation = ISOLATIONS.findLast(({ segment }) => segment === one.segment)
    if (isolation?.untilAt == null)
      throw new Error(`${one.segment} has no finished isolation in the scenario`)
    const closedAt = isolation.fromAt
    const { from, to } = usualWindow(closedAt, new Date(isolation.untilAt.getTime() - 60_000))
    const recordedAt = at(one.recorded)
    const subject = await readSubject(db, one.segment, recordedAt)
    const gauge = subject.gauges.find(({ tag }) => tag.endsWith('B'))
    if (gauge === undefined || subject.limitPaPerHour === null)
      throw new Error(`${one.segment} lacks gauge or limit`)
    const answer = await fitWindow(db, subject, gauge, { closedAt, fitFrom: from, fitTo: to })
    if (answer.kind === 'refused')
      throw new Error(`The test of ${one.segment} cannot be fitted: ${answer.message}`)
    const id = await insertIsolationTest(db, {
      segmentId: subject.segment.id,
      positionId: gauge.id,
      state: 'recorded',
      closedAt,
      fitFrom: from,
      fitTo: to,
      limitPaPerHour: subject.limitPaPerHour,
      result: answer.finding,
      note: one.note,
      recordedBy: PERSON_ID[one.recordedBy],
      recordedAt,
    })
    await decide(db, id, one)
  }
  return TESTS.length
}

async function decide(db: DbOrTx, id: number, { accepted, voided }: DemoTest): Promise<void> {
  const set = async (values: Partial<typeof isolationTest.$inferInsert>) => {
    await db.update(isolationTest).set(values).where(eq(isolationTest.id, id))
  }
  if (accepted !== null) {
    const when = at(accepted.at)
    await set({
      state: 'accepted',
      acceptedBy: PERSON_ID.bram,
      acceptedAt: when,
      acceptRemark: accepted.remark,
      acceptSignedActId: await sign(db, id, when, 'accept an isolation test'),
      revision: 2,
    })
  }
  if (voided !== null) {
    const when = at(voided.at)
    await set({
      state: 'voided',
      voidedBy: PERSON_ID.bram,
      voidedAt: when,
      voidRemark: voided.remark,
      voidSignedActId: await sign(db, id, when, 'void an isolation test'),
      revision: 3,
    })
  }
}

async function sign(db: DbOrTx, id: number, when: Date, meaning: string): Promise<number> {
  const [result] = await db.insert(signedAct).values({
    personId: PERSON_ID.bram,
    meaning,
    subjectKind: 'isolation-test',
    subjectId: String(id),
    at: when,
    machineAt: when,
    usedAt: when,
  })
  return result.insertId
}
