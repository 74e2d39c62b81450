/**
 * Whether the heating of a segment is energised: a fact of its own beside the state of any permit. It comes from the
 * readings of the supply that feeds the segment while they are fresh, or from what a person said; the newer of the two
 * counts. Where neither says, nobody knows, and not knowing is never taken for "off".
 */
import type { HeatingFact } from './permit-facts.ts'
import type { Quality } from './readings.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 3_600_000

/** A supply posts every five minutes while a segment is heated; three posts missed and nothing is known (our own rule). */
const SUPPLY_FRESH_MS = 15 * MINUTE_MS
/** Somebody's word that the heating is off counts for one shift; a switch can be thrown afterwards (our own rule). */
const OFF_STATEMENT_MS = 12 * HOUR_MS
/** An output counts as on from this share of what its set can give: below are offsets of the meters (our own rule). */
export const ON_SHARE = 0.01

/** The newest reading of one of a supply's channels. */
export interface SupplyReading {
  at: Date
  /** V or A; null where the logger wrote a word. */
  value: number | null
  quality: Quality
}

export interface SupplyNow {
  tag: string
  maxAmps: number
  openCircuitVolts: number
  volts: SupplyReading | null
  amps: SupplyReading | null
  /** Since when it has been as it is, as far back as its readings go; null where they do not say. */
  since: Date | null
}

export interface HeatingStatement {
  segment: string
  on: boolean
  at: Date
  by: string
}

/** What a channel says: on, off by its figure, off by the word of its logger, or nothing. */
type Said = 'on' | 'zero' | 'off' | null

function said(reading: SupplyReading | null, full: number): Said {
  if (reading === null) return null
  if (reading.quality === 'off') return 'off'
  if (reading.quality !== 'good' && reading.quality !== 'manual') return null
  if (reading.value === null) return null
  return Math.abs(reading.value) >= ON_SHARE * full ? 'on' : 'zero'
}

export interface SupplyFinding {
  on: boolean
  at: Date
  since: Date | null
  text: string
}

/**
 * What a supply's newest readings say, however old they are; null where they say nothing.
 *
 * Either channel alone shows that it is on. Amps at zero alone do not show that it is off: with an open joint the full
 * open-circuit voltage stands across the gap and no current flows.
 */
export function supplySays(supply: SupplyNow, when: (at: Date) => string): SupplyFinding | null {
  const volts = said(supply.volts, supply.openCircuitVolts)
  const amps = said(supply.amps, supply.maxAmps)
  const on = volts === 'on' || amps === 'on'
  const off = !on && (volts !== null || amps === 'off')
  if (!on && !off) return null
  const speaking = [volts === null ? null : supply.volts, amps === null ? null : supply.amps].filter(
    (reading) => reading !== null,
  )
  const at = on
    ? newest(speaking.map((reading) => reading.at))
    : oldest(speaking.map((reading) => reading.at))
  const text = on
    ? `${supply.tag} gave ${figure(supply.amps, 'A')} at ${figure(supply.volts, 'V')} at ${when(at)}`
    : `${supply.tag} was off at ${when(at)}`
  return { on, at, since: supply.since, text }
}

function figure(reading: SupplyReading | null, unit: string): string {
  if (reading === null || reading.value === null) return `an unknown number of ${unit}`
  const digits = unit === 'V' ? 1 : 0
  return `${reading.value.toFixed(digits)} ${unit}`
}

function newest(times: readonly Date[]): Date {
  return new Date(Math.max(...times.map((at) => at.getTime())))
}

function oldest(times: readonly Date[]): Date {
  return new Date(Math.min(...times.map((at) => at.getTime())))
}

interface Known {
  on: boolean
  at: Date
  since: Date | null
  basis: 'supply' | 'person'
  text: string
}

/**
 * Puts together what is known about the heating of segments that are heated as one.
 *
 * @param asked.segments their tags; off is said only where it is known for each of them
 * @param asked.supplies every set that may feed them
 * @param asked.statements the newest statement about each segment that has one
 * @param when how an instant is written inside a sentence
 */
export function judgeHeating(
  asked: {
    segments: readonly string[]
    supplies: readonly SupplyNow[]
    statements: readonly HeatingStatement[]
  },
  now: Date,
  when: (at: Date) => string,
): HeatingFact {
  const readings = fromSupplies(asked.supplies, when)
  const person = fromPeople(asked.segments, asked.statements, when)
  const fresh = readings !== null && now.getTime() - readings.at.getTime() <= SUPPLY_FRESH_MS
  // At one and the same instant the meter has it before the word.
  const first = [fresh ? readings : null, person]
    .filter((known) => known !== null)
    .sort((a, b) => b.at.getTime() - a.at.getTime())[0]
  if (first === undefined) return unknown(readings, 'and nothing newer is known')
  if (first.basis === 'supply') return fact(first)
  if (readings !== null && readings.at > first.at && readings.on !== first.on) {
    return unknown(readings, `later than what was said (${first.text}), and nothing newer is known`)
  }
  if (!first.on && now.getTime() - first.at.getTime() > OFF_STATEMENT_MS) {
    return unknown(first, `longer ago than the ${OFF_STATEMENT_MS / HOUR_MS} h for which that counts`)
  }
  return fact(first)
}

function fact(known: Known): HeatingFact {
  return {
    on: known.on,
    knownAt: known.at,
    since: known.since,
    basis: known.basis,
    text: `Heating ${known.on ? 'on' : 'off'}: ${known.text}.`,
  }
}

function unknown(last: Known | null, why: string): HeatingFact {
  if (last === null) {
    return {
      on: null,
      knownAt: null,
      since: null,
      basis: 'nothing',
      text: 'Nobody knows whether the heating is on: no supply is named whose readings say so, and nobody has said.',
    }
  }
  return {
    on: null,
    knownAt: last.at,
    since: null,
    basis: last.basis,
    text: `Nobody knows whether the heating is on. Last known: ${last.text}, ${why}.`,
  }
}

function fromSupplies(supplies: readonly SupplyNow[], when: (at: Date) => string): Known | null {
  const found = supplies.map((supply) => supplySays(supply, when))
  const speaking = found.filter((one) => one !== null)
  const on = speaking.filter((one) => one.on)
  if (on.length > 0) return joined(on, newest(on.map((one) => one.at)), true)
  if (speaking.length === 0 || speaking.length < found.length) return null
  return joined(speaking, oldest(speaking.map((one) => one.at)), false)
}

function joined(found: readonly SupplyFinding[], at: Date, on: boolean): Known {
  const since = found.flatMap((one) => (one.since === null ? [] : [one.since]))
  return {
    on,
    at,
    since: since.length < found.length ? null : on ? oldest(since) : newest(since),
    basis: 'supply',
    text: found.map(({ text }) => text).join('; '),
  }
}

function fromPeople(
  segments: readonly string[],
  statements: readonly HeatingStatement[],
  when: (at: Date) => string,
): Known | null {
  const about = statements.filter(({ segment }) => segments.includes(segment))
  const on = about.filter((one) => one.on)
  const counted = on.length > 0 ? on : about
  const covered = segments.every((tag) => about.some(({ segment }) => segment === tag))
  if (counted.length === 0 || (on.length === 0 && !covered)) return null
  const times = counted.map(({ at }) => at)
  const at = on.length > 0 ? newest(times) : oldest(times)
  return {
    on: on.length > 0,
    at,
    since: on.length > 0 ? oldest(times) : newest(times),
    basis: 'person',
    text: counted
      .map((one) => `${one.by} said ${one.on ? 'on' : 'off'} for ${one.segment} at ${when(one.at)}`)
      .join('; '),
  }
}
