/**
 * Thresholds that the demo's site has adopted, by its safety officer in 2025, and the size of its bays. Rulings and
 * signatures are invented data.
 */
import type { DbOrTx } from '../app/db/client.server.ts'
import { insertSetting } from '../app/db/queries/site-settings.server.ts'
import { insertAdoption } from '../app/db/queries/thresholds.server.ts'
import { signedAct } from '../app/db/schema/index.ts'
import { BAY_KEY } from '../app/domain/bay-volume.ts'
import { THRESHOLDS, type ThresholdKey } from '../app/domain/hazard-thresholds.ts'
import { at } from './demo-time.ts'
import { PERSON_ID } from './people.ts'

interface DemoAdoption {
  key: ThresholdKey
  value: number
  source: string
  reason: string
  adopted?: string
  ended?: string
}

/** Adopted together before the first permit was asked for. */
const FIRST_DAY = '2025-09-03 10:00'
const REVIEW = '2027-09-03 00:00'
/** When the officer lowered free access after a round at SG-15. */
const LOWERED = '2025-12-02 09:20'

const BURNS = 'Ruling 3 of the safety officer, hot surfaces'
const CURRENT = 'Ruling 4 of the safety officer, direct-current heating'
const AIR = 'Ruling 5 of the safety officer, tunnel air'
const WORK = 'Ruling 6 of the safety officer, work beside heated tube'

const ADOPTIONS: readonly DemoAdoption[] = [
  {
    key: 'touch-limit',
    value: 43,
    source: BURNS,
    reason: 'What bare hands are said to stand all day',
    ended: LOWERED,
  },
  {
    key: 'touch-limit',
    value: 40,
    source: BURNS,
    reason: 'Contact probes on site are good to three kelvins, so three are taken off',
    adopted: LOWERED,
  },
  { key: 'burn-second', value: 65, source: BURNS, reason: 'Lower end of what is told of bare metal' },
  { key: 'burn-minute', value: 51, source: BURNS, reason: 'As told of bare metal held for a minute' },
  {
    key: 'shock-volts',
    value: 50,
    source: CURRENT,
    reason: 'Counts for direct current too, open circuit included',
  },
  { key: 'joint-resistance', value: 0.05, source: CURRENT, reason: 'Twice what a clean bolted bar measures' },
  { key: 'implant-field', value: 0.5, source: CURRENT, reason: 'Notice at each barrier says the same' },
  {
    key: 'stroke-reserve',
    value: 10,
    source: WORK,
    reason: 'A guide that sticks shifts a tenth to the next joint',
  },
  { key: 'vent-overpressure', value: 0.1, source: WORK, reason: 'Setting of the reliefs on the vent valves' },
  { key: 'elastomer-limit', value: 120, source: WORK, reason: 'Bonnets of GV-04, GV-08, GV-12 and GV-S' },
  { key: 'combustible-free', value: 1, source: WORK, reason: 'Leaves room to walk on the other side' },
  { key: 'check-in', value: 30, source: WORK, reason: 'As long as somebody on call takes to the site' },
  { key: 'bay-air', value: 32, source: WORK, reason: 'Agreed with the works physician' },
  { key: 'oxygen-low', value: 19.5, source: AIR, reason: 'Alarm of the fixed and the personal monitors' },
  { key: 'oxygen-high', value: 23.5, source: AIR, reason: 'Alarm of the fixed and the personal monitors' },
  {
    key: 'oxygen-release',
    value: 20,
    source: AIR,
    reason: 'Held for ten minutes before a bay is given free',
  },
]

/** Writes the adoptions and the size of a bay. @returns how many adoptions */
export async function seedThresholds(db: DbOrTx): Promise<number> {
  for (const one of ADOPTIONS) await adopt(db, one)
  await insertSetting(db, {
    settingKey: BAY_KEY,
    value: { volumeM3: 1440 },
    setBy: PERSON_ID.ione,
    setAt: at(FIRST_DAY),
    reason: '150 m of tunnel between two curtains, 3.2 m wide and 3.0 m high',
  })
  return ADOPTIONS.length
}

async function adopt(db: DbOrTx, one: DemoAdoption): Promise<void> {
  const adoptedAt = at(one.adopted ?? FIRST_DAY)
  const [signed] = await db.insert(signedAct).values({
    personId: PERSON_ID.ione,
    meaning: 'adopt a threshold for this site',
    subjectKind: 'threshold',
    subjectId: one.key,
    at: adoptedAt,
    machineAt: adoptedAt,
    usedAt: adoptedAt,
  })
  await insertAdoption(db, {
    thresholdKey: one.key,
    value: one.value,
    unit: THRESHOLDS[one.key].unit,
    source: one.source,
    edition: 'September 2025',
    adoptedBy: PERSON_ID.ione,
    adoptedAt,
    reviewAt: at(REVIEW),
    endedAt: one.ended === undefined ? null : at(one.ended),
    endedBy: one.ended === undefined ? null : PERSON_ID.ione,
    reason: one.reason,
    signedActId: signed.insertId,
  })
}
