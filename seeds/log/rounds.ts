/** Rounds and handovers of every working day, with the figures of that day. */
import { SEGMENT_STATES } from '../../app/domain/segment-states.ts'
import { at } from '../demo-time.ts'
import type { PersonKey } from '../people.ts'
import { pick, scatter } from '../readings/noise.ts'
import { pressureAt } from '../readings/pressures.ts'
import { siteDay, siteWeekday } from '../readings/site-clock.ts'
import { meterKwh } from '../readings/supplies.ts'
import { tunnelAirC } from '../readings/tunnel-air.ts'
import { wallC } from '../readings/wall-temperature.ts'
import { SEGMENTS } from '../register/segments.ts'
import { stepsOf } from '../segment-states.ts'
import { type DemoEntry, entry, pa } from './entry.ts'

const DAY_MS = 86_400_000
const FIRST_DAY = at('2025-09-09 12:00')
/** The last morning's own round and handover stand in the entries of the last weeks. */
const LAST_DAY = at('2026-11-06 12:00')

/** Crews change weeks: A by day in even ones. */
function crewOf(week: number): { day: readonly PersonKey[]; night: PersonKey } {
  return week % 2 === 0
    ? { day: ['pim', 'odalys'], night: 'corwin' }
    : { day: ['corwin', 'nerys'], night: 'pim' }
}

function workingDays(): { day: string; index: number; week: number }[] {
  const days: { day: string; index: number; week: number }[] = []
  for (let ms = FIRST_DAY.getTime(); ms <= LAST_DAY.getTime(); ms += DAY_MS) {
    const weekday = siteWeekday(ms)
    if (weekday === 0 || weekday === 6) continue
    const week = Math.floor((ms - FIRST_DAY.getTime()) / (7 * DAY_MS))
    days.push({ day: siteDay(ms), index: days.length, week })
  }
  return days
}

function crossText(tag: string, when: Date): string {
  const said = pressureAt(tag, 'B', when.getTime())
  return typeof said === 'number' ? `${tag} ${pa(said)}` : `${tag} gauges ${said}`
}

const oxygen = (when: Date) => (20.8 + 0.05 * scatter('oxygen', when.getTime())).toFixed(1)

function round(day: string, index: number, by: PersonKey): DemoEntry {
  const when = at(`${day} ${pick(['07:20', '07:35', '07:50', '08:05'], `${day} round`)}`)
  const [first, second, third] = [index, index + 5, index + 11].map(
    (n) => SEGMENTS[n % SEGMENTS.length]?.tag ?? 'SG-01',
  ) as [string, string, string]
  const box = String(1 + ((index * 7) % 16)).padStart(2, '0')
  const air = tunnelAirC(when.getTime()).toFixed(1)
  const warm = SEGMENTS.filter(({ tag }) => wallC(tag, when.getTime()) > 40)
  const heat = warm.map(({ tag }) => `${tag} is hot, barriers stand as they should.`)
  const text = pick(
    [
      `Read at the racks: ${crossText(first, when)}, ${crossText(second, when)}, ${crossText(third, when)}. Tunnel ${air} °C, oxygen ${oxygen(when)} %.`,
      `Walked to VB-${box} and back. ${crossText(first, when)}; ${crossText(second, when)}. Nothing wet, nothing loose.`,
      `Meters at the start of the day: west ${meterKwh('W', when.getTime())}, east ${meterKwh('E', when.getTime())} kWh. ${crossText(first, when)}.`,
      `${crossText(first, when)} and ${crossText(third, when)}. Fans run, oxygen ${oxygen(when)} % at VB-${box}, air ${air} °C.`,
      `Bellows scales near VB-${box} read and as before. ${crossText(second, when)}, ${crossText(third, when)}.`,
    ],
    `${day} round text`,
  )
  return entry(when, 12 + (index % 9), { segment: null, kind: 'round', by, text: [text, ...heat].join(' ') })
}

/** The segment in service that reads highest at its cross. */
function highest(when: Date): string {
  let worst = { tag: '', said: 0 }
  for (const { tag } of SEGMENTS) {
    const said = pressureAt(tag, 'B', when.getTime())
    const state = stepsOf(tag).findLast(({ since }) => since <= when)?.state
    if (state === 'in-service' && typeof said === 'number' && said > worst.said) worst = { tag, said }
  }
  return `Highest in service is ${worst.tag} with ${pa(worst.said)}`
}

/** The leak detector is tried every week against its own small leak; it loses a little by the month. */
function detectorTry(day: string, week: number): DemoEntry {
  const when = at(`${day} 11:10`)
  const shown = 3.2e-9 * (1 - 0.0015 * week + 0.01 * scatter('LD-1', when.getTime()))
  return entry(when, 10, {
    segment: null,
    kind: 'test',
    by: week % 2 === 0 ? 'odalys' : 'nerys',
    text: `LD-1 shows ${pa(shown).replace('Pa', 'Pa·m³/s')} of its test leak of 3.2×10⁻⁹; ${week % 4 === 3 ? 'inlet filter exchanged' : 'background quiet'}.`,
  })
}

/** What is out of the ordinary at an instant, in the words of a handover. */
function standing(when: Date): string[] {
  return SEGMENTS.flatMap(({ tag }) => {
    const current = stepsOf(tag).findLast(({ since }) => since <= when)
    if (current === undefined || current.state === 'in-service' || tag === 'SG-11') return []
    const hours = Math.round((when.getTime() - current.since.getTime()) / 3_600_000)
    const since = hours < 48 ? `${hours} h` : `${Math.round(hours / 24)} days`
    return [`${tag} ${SEGMENT_STATES[current.state].label.toLowerCase()} for ${since}`]
  })
}

function handover(day: string, index: number, from: PersonKey, to: string): DemoEntry {
  const when = at(`${day} ${pick(['18:40', '18:45', '18:50'], `${day} handover`)}`)
  const open = standing(when)
  const looked = crossText(SEGMENTS[(index * 3) % 16]?.tag ?? 'SG-01', when)
  const quiet = pick(
    [
      `All segments quiet; ${crossText('SG-11', when)} on its cart, ${looked}.`,
      `Nothing open. ${highest(when)}, feeder east at ${meterKwh('E', when.getTime())} kWh.`,
      `No work left over. ${looked} was the last I looked at, oxygen ${oxygen(when)} %.`,
      `Tunnel locked at ${tunnelAirC(when.getTime()).toFixed(1)} °C. ${highest(when)}.`,
    ],
    `${day} quiet`,
  )
  const text =
    open.length === 0
      ? quiet
      : `${open.join('; ')}. ${pick(['Rest quiet.', 'Everything else in service.', 'Keys in the box, carts full.'], `${day} rest`)}`
  return entry(when, 8, { segment: null, kind: 'handover', by: from, text: `To ${to}: ${text}` })
}

/** A round in the morning and a handover in the evening, and the leak detector's try once a week. */
export function dailyEntries(): DemoEntry[] {
  const days = workingDays()
  const tries = days.filter(({ week }, index) => days[index - 1]?.week !== week)
  return [...dailyRounds(days), ...tries.map(({ day, week }) => detectorTry(day, week))]
}

function dailyRounds(days: ReturnType<typeof workingDays>): DemoEntry[] {
  return days.flatMap(({ day, index, week }) => {
    const { day: crew, night } = crewOf(week)
    const walker = crew[index % 2] as PersonKey
    const name = night === 'corwin' ? 'Corwin on call' : 'Pim on call'
    return [round(day, index, walker), handover(day, index, crew[(index + 1) % 2] as PersonKey, name)]
  })
}
