/** Which files had been taken in before the demo begins, by whom and when; the newest is made last. */
import { TZDate } from '@date-fns/tz'
import { DEMO_ZONE } from '../demo-time.ts'
import { PERSON_ID } from '../people.ts'
import { SEGMENTS } from '../register/segments.ts'
import { BAKES } from '../scenario/bakes.ts'
import { archiveMonths, demoNights, everyStep, keptInArchive, type Span, spanOfNight } from './calendar.ts'
import type { LoggerFile } from './files.ts'
import { otherNightFile, powerFile, temperatureFile } from './logger-files.ts'
import { eastFile, nightFile, westFile } from './night-file.ts'
import { THERMOCOUPLES } from './temperatures.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 60 * MINUTE_MS
/** Temperatures and power are kept whole from here: the night before the first of the two present bakes. */
const FIVE_MINUTES_SINCE = '2026-10-31'
/** The power logger's months have a row every so often. */
const POWER_ARCHIVE_MS = 6 * HOUR_MS

/** Made only when its turn comes: all of them together are too much to hold. */
export interface TakenInFile {
  make: () => LoggerFile
  takenInBy: number
  takenInAt: Date
}

const later = (ms: number, minutes: number) => new Date(ms + minutes * MINUTE_MS)

/** Months of the three loggers that ran all along: thinned, but for the days on which much happened. */
function months(): TakenInFile[] {
  const west = SEGMENTS.filter(({ id }) => id <= 8).map(({ tag }) => tag)
  const keptWest = keptInArchive(west)
  const keptOf = new Map(SEGMENTS.map(({ tag }) => [tag, keptInArchive([tag])]))
  return archiveMonths().flatMap(({ month, span }) => {
    const rows = everyStep(span.fromMs, span.toMs, 10 * MINUTE_MS)
    const name = (source: string) => `${source}_${month}_archive.csv`
    const makes = [
      () => westFile(name('NL-W'), rows.filter(keptWest), span.toMs),
      () =>
        eastFile(name('NL-E'), rows, span.toMs, (segment, atMs) => keptOf.get(segment)?.(atMs) === true),
      () => powerFile(name('NL-P'), everyStep(span.fromMs, span.toMs, POWER_ARCHIVE_MS), span.toMs),
    ]
    return makes.map((make, index) => ({
      make,
      takenInBy: PERSON_ID.juniper,
      takenInAt: later(span.toMs, 95 + 4 * index),
    }))
  })
}

/** One file for each past bake, with the twelve thermocouples of its segment. */
function bakeRecords(): TakenInFile[] {
  return BAKES.flatMap(({ segment, cartAt, coldAt }) => {
    if (coldAt === null) return []
    const span: Span = { fromMs: cartAt.getTime() - (cartAt.getTime() % HOUR_MS), toMs: coldAt.getTime() }
    const places = THERMOCOUPLES.filter((one) => one.segment === segment)
    const day = new TZDate(span.fromMs, DEMO_ZONE).toISOString().slice(0, 10)
    const make = () =>
      temperatureFile(
        `NL-T_${day}_bake_${segment}.csv`,
        everyStep(span.fromMs, span.toMs, 10 * MINUTE_MS),
        span.toMs,
        places,
      )
    return [{ make, takenInBy: PERSON_ID.bram, takenInAt: later(span.toMs, 150) }]
  })
}

/** Mornings on which the crews took the files in: the four of them by turns. */
const CREW = [PERSON_ID.pim, PERSON_ID.odalys, PERSON_ID.corwin, PERSON_ID.nerys]

function nights(): TakenInFile[] {
  const all = demoNights()
  return all.flatMap((night, index) => {
    const endsMs = spanOfNight(night).toMs
    const makes: (() => LoggerFile)[] = [() => nightFile('NL-E', night)]
    // The west logger's last file is left for a person to take in.
    if (index < all.length - 1) makes.unshift(() => nightFile('NL-W', night))
    if (night >= FIVE_MINUTES_SINCE) {
      for (const source of ['NL-T', 'NL-P'] as const) {
        makes.push(() => {
          const file = otherNightFile(source, night)
          if (file === null) throw new Error(`${source} delivered nothing for ${night}`)
          return file
        })
      }
    }
    return makes.map((make, turn) => ({
      make,
      takenInBy: CREW[(index + turn) % CREW.length] as number,
      takenInAt: later(endsMs, 35 + ((index * 7) % 17) + turn),
    }))
  })
}

/** All of them in the order in which they were taken in. */
export function takenInFiles(): TakenInFile[] {
  return [...months(), ...bakeRecords(), ...nights()].sort(
    (a, b) => a.takenInAt.getTime() - b.takenInAt.getTime(),
  )
}
