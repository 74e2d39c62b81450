import { log } from '../../log.server.ts'
import { productNow } from '../../services/clock.server.ts'
import { judgeForecasts } from '../../services/forecasts.server.ts'
import type { JobContext } from '../../services/jobs.server.ts'

/** Judges the open forecasts of record. What cannot be judged yet stays open; done twice, it finds nothing more to do. */
export async function judgeRecordedForecasts({ db, signal }: JobContext<'judge-forecasts'>): Promise<void> {
  const judged = await judgeForecasts(db, await productNow(db), signal)
  if (judged > 0) log.info('judged forecasts of record', { judged })
}
