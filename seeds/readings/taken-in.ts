/** Which files had been taken in before the demo begins, by whom and when; the newest is made last. */
import type { Answer } from '../../app/domain/night-files/types.ts'
import { PERSON_ID } from '../people.ts'
import { SEGMENTS } from '../register/segments.ts'
import { BAKES } from '../scenario/bakes.ts'
import { RECORDINGS } from '../scenario/recordings.ts'
import {
  archiveMonths,
  demoNights,
  everyStep,
  keptInArchive,
  pressurePeriodMs,
  type Span,
  spanOfNight,
} from './calendar.ts'
import type { LoggerFile } from './files.ts'
import {
  LOST_CLOCK_ANSWER,
  otherNightFile,
  powerFile,
  RESIDUAL_GAS_MISSING,
  RESIDUAL_GAS_SINCE,
  temperatureFile,
} from './logger-files.ts'
import { eastFile, nightFile, westFile } from './night-file.ts'
import { recorderFile } from './recorder-file.ts'
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
  /** Time between its rows where that is not what the source's profile says now; the longest of a thinned file. */
  periodSeconds?: number
  /** What the person who took it in answered when the reader asked. */
  answer?: Pick<Answer, 'id' | 'choice'>
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
    return makes.map((make, index) => carriedOver(make, span, index, HOUR_MS))
  })
}

/** Months of the power logger: a row every six hours, and every hour while a segment was heated. */
function powerMonths(): TakenInFile[] {
  return archiveMonths(FIVE_MINUTES_SINCE).map(({ month, span }) => {
    const rows = everyStep(span.fromMs, span.toMs, HOUR_MS).filter(
      (atMs) => atMs % POWER_ARCHIVE_MS === 0 || SEGMENTS.some(({ tag }) => isHeated(tag, atMs)),
    )
    return carriedOver(
      () => powerFile(`NL-P_${month}_archive.csv`, rows, span.toMs),
      span,
      2,
      POWER_ARCHIVE_MS,
    )
  })
}

function carriedOver(make: () => LoggerFile, span: Span, turn: number, periodMs: number): TakenInFile {
  return {
    make,
    periodSeconds: periodMs / 1000,
    takenInBy: PERSON_ID.juniper,
    takenInAt: later(span.toMs, 95 + 4 * turn),
  }
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
    return [{ make, periodSeconds: 600, takenInBy: PERSON_ID.bram, takenInAt: later(span.toMs, 150) }]
  })
}

/** Mornings on which the crews took the files in: the four of them by turns. */
const CREW = [PERSON_ID.pim, PERSON_ID.odalys, PERSON_ID.corwin, PERSON_ID.nerys]

function nights(): TakenInFile[] {
  const all = demoNights()
  return all.flatMap((night, index) => {
    const endsMs = spanOfNight(night).toMs
    const periodSeconds = pressurePeriodMs(night) / 1000
    const makes: Omit<TakenInFile, 'takenInBy' | 'takenInAt'>[] = [
      { make: () => nightFile('NL-E', night), periodSeconds },
    ]
    // The west logger's last file is left for a person to take in.
    if (index < all.length - 1) makes.unshift({ make: () => nightFile('NL-W', night), periodSeconds })
    const others = night >= FIVE_MINUTES_SINCE ? (['NL-T', 'NL-P', 'NL-R'] as const) : (['NL-R'] as const)
    for (const source of others) {
      const delivered = source !== 'NL-R' || (night >= RESIDUAL_GAS_SINCE && night !== RESIDUAL_GAS_MISSING)
      if (!delivered) continue
      const make = () => {
        const file = otherNightFile(source, night)
        if (file === null) throw new Error(`${source} delivered nothing for ${night}`)
        return file
      }
      const lost = source === 'NL-R' && night === LOST_CLOCK_ANSWER.night
      makes.push(lost ? { make, answer: { id: 'start', choice: LOST_CLOCK_ANSWER.start } } : { make })
    }
    return makes.map((one, turn) => ({
      ...one,
      takenInBy: CREW[(index + turn) % CREW.length] as number,
      takenInAt: later(endsMs, 35 + ((index * 7) % 17) + turn),
    }))
  })
}

/** Recordings, taken in within the hour. */
function recordings(): TakenInFile[] {
  return RECORDINGS.map((one) => ({
    make: () => recorderFile(one),
    takenInBy: PERSON_ID[one.by],
    takenInAt: later(one.untilAt.getTime(), 40),
  }))
}

/** All of them in the order in which they were taken in. */
export function takenInFiles(): TakenInFile[] {
  return [...pressureMonths(), ...powerMonths(), ...bakeRecords(), ...recordings(), ...nights()].sort(
    (a, b) => a.takenInAt.getTime() - b.takenInAt.getTime(),
  )
}
