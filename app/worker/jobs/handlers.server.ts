/** Which function does which kind of job. */
import type { JobHandlers } from '../../services/jobs.server.ts'
import { feedDemo } from './feeder.server.ts'
import { judgeRecordedForecasts } from './judge-forecasts.server.ts'
import { noteDeviations } from './note-deviations.server.ts'
import { partitionReadings } from './partition-readings.server.ts'
import { purgeLeftovers } from './purge-leftovers.server.ts'
import { purgeEndedSessions } from './purge-sessions.server.ts'
import { readNightFile, takeInNightFile } from './read-night-file.server.ts'
import { rollUp } from './rollup.server.ts'
import { solveScheduleJob } from './solve-schedule.server.ts'
import { watchPermits } from './watch-permits.server.ts'

export const JOB_HANDLERS: JobHandlers = {
  'feed-demo': feedDemo,
  'note-deviations': noteDeviations,
  'judge-forecasts': judgeRecordedForecasts,
  'partition-readings': partitionReadings,
  'purge-sessions': purgeEndedSessions,
  'purge-leftovers': purgeLeftovers,
  'read-night-file': readNightFile,
  'roll-up': rollUp,
  'solve-schedule': solveScheduleJob,
  'take-in-night-file': takeInNightFile,
  'watch-permits': watchPermits,
}
