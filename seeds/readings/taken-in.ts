/** Which files had been taken in before the demo begins, by whom and when; the newest is made last. */
import { PERSON_ID } from '../people.ts'
import { SEGMENTS } from '../register/segments.ts'
import { BAKES } from '../scenario/bakes.ts'
import { archiveMonths, demoNights, everyStep, keptInArchive, type Span, spanOfNight } from './calendar.ts'
import type { LoggerFile } from './files.ts'
import { otherNightFile, powerFile, temperatureFile } from './logger-files.ts'
import { eastFile, nightFile, westFile } from './night-file.ts'
import { siteDay } from './site-clock.ts'
import { THERMOCOUPLES } from './temperatures.ts'
import { isHeated } from './wall-temperature.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 60 * MINUTE_MS
/** Temperatures and power are kept whole in the nights from here on: since the second of the present bakes soaks. */
const FIVE_MINUTES_SINCE = '2026-11-05'
/** The power logger's months have a row every so often. */
const POWER_ARCHIVE_MS = 6 * HOUR_MS

/** Made only when its turn comes: all of them together are too much to hold. */
export interface TakenInFile {
  make: () => LoggerFile
  takenInBy: number
  takenInAt: Date
}

const later = (ms: number, minutes: number) => new Date(ms + minutes * MINUTE_MS)

/** Months of the pressure loggers: thinned to a row an hour, but for the stretches in which much happened. */
function pressureMonths(): TakenInFile[] {
  const west = SEGMENTS.filter(({ id }) => id <= 8).map(({ tag }) => tag)
  const keptWest = keptInArchive(west)
  const keptOf = new Map(SEGMENTS.map(({ tag }) => [tag, keptInArchive([tag])]))
  return archiveMonths().flatMap(({ month, span }) => {
    const rows = everyStep(span.fromMs, span.toMs, 10 * MINUTE_MS)
    const name = (source: string) => `${source}_${month}_archive.csv`
    const makes = [
      () => westFile(name('NL-W'), rows.filter(keptWest), span.toMs),
      () => eastFile(name('NL-E'), rows, span.toMs, (segment, atMs) => keptOf.get(segment)?.(atMs) === true),
    ]
    return makes.map((make, index) => carriedOver(make, span, index))
  })
}

/** Months of the power logger: a row every six hours, and every hour while a segment was heated. */
function powerMonths(): TakenInFile[] {
  return archiveMonths(FIVE_MINUTES_SINCE).map(({ month, span }) => {
    const rows = everyStep(span.fromMs, span.toMs, HOUR_MS).filter(
      (atMs) => atMs % POWER_ARCHIVE_MS === 0 || SEGMENTS.some(({ tag }) => isHeated(tag, atMs)),
    )
    return carriedOver(() => powerFile(`NL-P_${month}_archive.csv`, rows, span.toMs), span, 2)
  })
}

function carriedOver(make: () => LoggerFile, span: Span, turn: number): TakenInFile {
  return { make, takenInBy: PERSON_ID.juniper, takenInAt: later(span.toMs, 95 + 4 * turn) }
}

/** One file for each bake, with the twelve thermocouples of its segment. */
function bakeRecords(): TakenInFile[] {
  return BAKES.flatMap(({ segment, cartAt, coldAt }) => {
    // Bakes of the present go on in the nights' own files.
    const toMs = coldAt?.getTime() ?? spanOfNight(FIVE_MINUTES_SINCE).fromMs
    const span: Span = { fromMs: cartAt.getTime() - (cartAt.getTime() % HOUR_MS), toMs }
    const places = THERMOCOUPLES.filter((one) => one.segment === segment)
    const day = siteDay(span.fromMs)
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
  return [...pressureMonths(), ...powerMonths(), ...bakeRecords(), ...nights()].sort(
    (a, b) => a.takenInAt.getTime() - b.takenInAt.getTime(),
  )
}
