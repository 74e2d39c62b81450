/**
 * Instants typed by people: a site date and time as a browser's date-time field sends it ("2026-11-09T08:00"), with an
 * offset where the clock change makes one local time mean two instants.
 */
import { tzOffset } from '@date-fns/tz'
import { z } from 'zod'

const LOCAL = /^(\d{4})-(\d{2})-(\d{2})[T ](\d{2}):(\d{2})(?::(\d{2}))?(?:\s?(Z|[+-]\d{2}:\d{2}))?$/

export type LocalTime =
  | { kind: 'instant'; at: Date }
  | { kind: 'ambiguous'; first: Date; second: Date }
  | { kind: 'missing'; offsetBefore: string }
  | { kind: 'unreadable' }

/** Reads a site-local date and time in a zone; says so when it exists twice or not at all. */
export function readLocalTime(text: string, zone: string): LocalTime {
  const match = LOCAL.exec(text.trim())
  if (match === null) return { kind: 'unreadable' }
  const [year, month, day, hour, minute] = match.slice(1, 6).map(Number) as [
    number,
    number,
    number,
    number,
    number,
  ]
  const second = Number(match[6] ?? 0)
  const wall = Date.UTC(year, month - 1, day, hour, minute, second)
  const check = new Date(wall)
  if (
    check.getUTCMonth() !== month - 1 ||
    check.getUTCDate() !== day ||
    hour > 23 ||
    minute > 59 ||
    second > 59
  ) {
    return { kind: 'unreadable' }
  }
  const offset = match[7]
  if (offset !== undefined) return { kind: 'instant', at: new Date(wall - offsetMinutes(offset) * 60_000) }
  // The two offsets around the time; an instant counts when its own offset leads back to the same wall time.
  const candidates = new Set<number>()
  for (const probe of [wall - 86_400_000, wall + 86_400_000]) candidates.add(tzOffset(zone, new Date(probe)))
  const instants = [...candidates]
    .map((minutes) => new Date(wall - minutes * 60_000))
    .filter((at) => tzOffset(zone, at) * 60_000 === wall - at.getTime())
    .sort((a, b) => a.getTime() - b.getTime())
  const [first, second2] = instants
  if (first === undefined)
    return { kind: 'missing', offsetBefore: offsetText(tzOffset(zone, new Date(wall - 86_400_000))) }
  if (second2 === undefined) return { kind: 'instant', at: first }
  return { kind: 'ambiguous', first, second: second2 }
}

function offsetMinutes(text: string): number {
  if (text === 'Z') return 0
  const sign = text.startsWith('-') ? -1 : 1
  return sign * (Number(text.slice(1, 3)) * 60 + Number(text.slice(4, 6)))
}

/** Minutes east of UTC as `+01:00`. */
export function offsetText(minutes: number): string {
  const size = Math.abs(minutes)
  const hours = String(Math.floor(size / 60)).padStart(2, '0')
  return `${minutes < 0 ? '-' : '+'}${hours}:${String(size % 60).padStart(2, '0')}`
}

/** A field that takes a site-local date and time and gives an instant. */
export function siteInstant(zone: string) {
  return z.string().transform((text, context): Date => {
    const read = readLocalTime(text, zone)
    if (read.kind === 'instant') return read.at
    const message =
      read.kind === 'unreadable'
        ? 'Give a date and time such as 2026-11-09 08:00.'
        : read.kind === 'missing'
          ? `This time does not exist: the clock was put forward. If the logger kept its old time, add the offset, such as ${text.trim()} ${read.offsetBefore}.`
          : `This hour came twice. Add the offset: ${text.trim()} ${offsetText(tzOffset(zone, read.first))} for the first, ${offsetText(tzOffset(zone, read.second))} for the second.`
    context.addIssue({ code: 'custom', message })
    return z.NEVER
  })
}
