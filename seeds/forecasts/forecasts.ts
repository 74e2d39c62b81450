/**
 * Forecasts that were put on record during the pump-downs of the demo: each computed by the product's own code from the
 * readings there were at that moment, and judged by it afterwards.
 */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { insertForecast } from '../../app/db/queries/forecasts.server.ts'
import { judgeForecasts, recordOf } from '../../app/services/forecasts.server.ts'
import { forecastSegment, readForecastSubject } from '../../app/services/forecasts-segment.server.ts'
import { DEMO_START } from '../demo-time.ts'
import { PERSON_ID } from '../people.ts'
import { VENTS } from '../scenario/events.ts'

const HOUR_MS = 3_600_000

/** Hours after the cross-over at which forecasts were kept, and for how far ahead: so many times lower than it read. */
const KEPT: Record<string, readonly (readonly [hours: number, times: number])[]> = {
  'SG-15': [
    [16, 2],
    [24, 2],
    [24, 4],
    [36, 2],
    [48, 1.5],
    [48, 3],
    [72, 1.6],
    [96, 1.8],
    [120, 1.5],
  ],
  'SG-06': [
    [18, 2],
    [26, 3],
    [40, 2],
    [40, 4],
    [65, 1.5],
    [65, 2.5],
    [90, 2],
    [112, 1.4],
    [136, 1.5],
  ],
  'SG-10': [
    [15, 2],
    [24, 3],
    [44, 1.6],
    [44, 2.2],
    [66, 1.7],
  ],
  'SG-11': [
    [20, 2],
    [42, 1.4],
    [64, 2.4],
  ],
}

/** Keeps and judges them. Questions that the product refused at the time left nothing on record. */
export async function seedForecasts(db: DbOrTx): Promise<number> {
  let kept = 0
  for (const { segment, pumpingAt } of VENTS) {
    const asked = KEPT[segment]
    if (pumpingAt === null || asked === undefined) continue
    for (const [hours, times] of asked) {
      const madeAt = new Date(pumpingAt.getTime() + hours * HOUR_MS)
      const subject = await readForecastSubject(db, segment, madeAt)
      const first = await forecastSegment(db, subject, madeAt, { targetPa: null, from: null, to: null })
      const last = first?.points.at(-1)?.pa
      if (last === undefined) throw new Error(`${segment} has no readings after ${hours} h of pumping`)
      const targetPa = Number((last / times).toPrecision(2))
      const forecast = await forecastSegment(db, subject, madeAt, { targetPa, from: null, to: null })
      const row = forecast === null ? null : recordOf(forecast, '')
      if (row === null) continue
      await insertForecast(db, { ...row, segmentId: subject.segment.id, madeBy: PERSON_ID.bram, madeAt })
      kept += 1
    }
    // The worker would have judged them in the days after; two weeks on is all told.
    const later = new Date(Math.min(DEMO_START.getTime(), pumpingAt.getTime() + 14 * 24 * HOUR_MS))
    await judgeForecasts(db, later)
  }
  return kept
}
