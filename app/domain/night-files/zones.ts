import { tzOffset } from '@date-fns/tz'

const MINUTE = 60_000
const DAY = 86_400_000
const STEP = 15 * MINUTE

/** Offset of a fixed zone text such as +01:00 or UTC, in minutes; null for a zone that has a name. */
function fixedOffset(zone: string): number | null {
  if (zone === 'UTC' || zone === 'Z') return 0
  const match = /^([+-])(\d{2}):(\d{2})$/.exec(zone)
  if (match === null) return null
  return (match[1] === '-' ? -1 : 1) * (Number(match[2]) * 60 + Number(match[3]))
}

/** Offset of an instant in a zone, in minutes east of UTC. */
export function offsetAt(zone: string, atMs: number): number {
  return fixedOffset(zone) ?? tzOffset(zone, new Date(atMs))
}

/** An offset as text, `+01:00`. */
export function offsetText(minutes: number): string {
  const two = (value: number) => String(value).padStart(2, '0')
  const size = Math.abs(minutes)
  return `${minutes < 0 ? '-' : '+'}${two(Math.floor(size / 60))}:${two(size % 60)}`
}

/** Wall time (as if UTC) in text, `2026-10-25 02:59:30`. */
export function wallText(wallMs: number): string {
  return new Date(wallMs).toISOString().slice(0, 19).replace('T', ' ')
}

/**
 * Wall time to instants for one zone. Offsets change on whole quarters of an hour in every zone in use, so the
 * offsets found for a quarter serve all its rows.
 */
export class ZoneClock {
  readonly zone: string
  readonly #fixed: number | null
  readonly #quarters = new Map<number, readonly number[]>()

  constructor(zone: string) {
    this.zone = zone
    this.#fixed = fixedOffset(zone)
  }

  /** Offsets in minutes that the wall time may have: none, one, or two (the one that gives the earlier instant first). */
  offsets(wallMs: number): readonly number[] {
    if (this.#fixed !== null) return [this.#fixed]
    const quarter = Math.floor(wallMs / STEP)
    const known = this.#quarters.get(quarter)
    if (known !== undefined) return known
    if (this.#quarters.size > 100_000) this.#quarters.clear()
    const start = quarter * STEP
    const around = [offsetAt(this.zone, start - DAY), offsetAt(this.zone, start + DAY)]
    const found = Array.from(new Set(around))
      .filter((offset) => offsetAt(this.zone, start - offset * MINUTE) === offset)
      .sort((a, b) => b - a)
    this.#quarters.set(quarter, found)
    return found
  }

  instants(wallMs: number): number[] {
    return this.offsets(wallMs).map((offset) => wallMs - offset * MINUTE)
  }
}
