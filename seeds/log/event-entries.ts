/** What the crews wrote about leaks, vents, exchanged gauges, tests and the power dip before the last weeks. */
import { at } from '../demo-time.ts'
import type { PersonKey } from '../people.ts'
import { pick } from '../readings/noise.ts'
import { pressureAt } from '../readings/pressures.ts'
import { SEGMENTS, segmentOf } from '../register/segments.ts'
import {
  type DemoExchange,
  type DemoLeak,
  type DemoVent,
  EXCHANGES,
  ISOLATIONS,
  LEAKS,
  POWER_DIP,
  VENTS,
} from '../scenario/events.ts'
import { type DemoEntry, entry, hoursAfter, pa } from './entry.ts'

/** From here on the entries of the last weeks tell the story themselves. */
const TOLD_SINCE = at('2026-10-20')

function said(segment: string, gauge: 'A' | 'B' | 'C', when: Date): string {
  const value = pressureAt(segment, gauge, when.getTime())
  return typeof value === 'number' ? pa(value) : value
}

const SPRAYED: Record<DemoLeak['kind'], string> = {
  gasket: 'Helium round the flanges one by one',
  weld: 'Helium along the welds, tent over tent',
  valve: 'Vent side of the valve filled with helium',
  feedthrough: 'Helium on every feedthrough of the cross',
}

function nextMorning(after: Date): Date {
  const morning = at(`${hoursAfter(after, 16).toISOString().slice(0, 10)} 07:25`)
  return morning > after ? morning : hoursAfter(morning, 24)
}

function leakEntries(leak: DemoLeak): DemoEntry[] {
  const { segment, opensAt, foundAt, mendedAt, by } = leak
  const noticed = nextMorning(opensAt)
  const before = hoursAfter(opensAt, -1)
  const place = (segmentOf(segment).startM + leak.offsetM).toFixed(0)
  const size = leak.sizePaM3S
    .toExponential(0)
    .replace('e', '×10')
    .replace('-', '⁻')
    .replace(/\d$/, (one) => '⁰¹²³⁴⁵⁶⁷⁸⁹'[Number(one)] ?? one)
  const entries = [
    entry(noticed < foundAt ? noticed : hoursAfter(foundAt, -1.5), 15, {
      segment,
      kind: 'note',
      by,
      text: `Cross went from ${said(segment, 'B', before)} to ${said(segment, 'B', hoursAfter(opensAt, 1))} around ${opensAt.toISOString().slice(11, 16)} UTC; argon with it on the analyser, so air.`,
    }),
    entry(foundAt, 20, {
      segment,
      kind: 'leak-check',
      by,
      text: `${SPRAYED[leak.kind]} with LD-1 at the cross: clear answer at the ${leak.place} (${place} m). About ${size} Pa·m³/s of air.`,
    }),
    entry(mendedAt, 25, {
      segment,
      kind: 'leak-check',
      by,
      text: `${leak.place[0]?.toUpperCase()}${leak.place.slice(1)}: ${leak.remedy}.`,
    }),
  ]
  if (leak.temporaryUntil !== null) {
    entries.push(
      entry(hoursAfter(mendedAt, 0.5), 15, {
        segment,
        kind: 'note',
        by,
        text: `Temporary seal on the ${leak.place} entered in the register; to be looked at again by ${leak.temporaryUntil.toISOString().slice(0, 10)}.`,
      }),
    )
  }
  return entries
}

function ventEntries(vent: DemoVent): DemoEntry[] {
  const { segment, ventedAt, roughingAt, pumpingAt, roughingSet, by } = vent
  if (roughingAt === null || pumpingAt === null) return []
  const tenHours = hoursAfter(pumpingAt, 10)
  return [
    entry(hoursAfter(ventedAt, -0.4), 10, {
      segment,
      kind: 'valve',
      by,
      text: 'Gates on both sides shut and locked, gauges switched off, pump port shut.',
    }),
    entry(ventedAt, 35, {
      segment,
      kind: 'vent',
      by,
      text: `${vent.reason}. Oxygen in the tunnel never below 20.6 % while the gas went in.`,
    }),
    entry(roughingAt, 15, {
      segment,
      kind: 'pump',
      by: 'pim',
      text: `Closed up and ${roughingSet} started; all bolts drawn up twice.`,
    }),
    entry(pumpingAt, 15, {
      segment,
      kind: 'valve',
      by: 'odalys',
      text: `Crossed over to the cart at 4 Pa after ${((pumpingAt.getTime() - roughingAt.getTime()) / 3_600_000).toFixed(1)} h of roughing.`,
    }),
    entry(hoursAfter(pumpingAt, 19), 10, {
      segment,
      kind: 'round',
      by,
      text: `${said(segment, 'B', tenHours)} at the cross ten hours after the cross-over, ${said(segment, 'B', hoursAfter(pumpingAt, 19))} now: on the line that one expects.`,
    }),
  ]
}

function exchangeEntries(one: DemoExchange): DemoEntry[] {
  const short = one.position.slice(3, 5)
  const segment = SEGMENTS.find((candidate) => candidate.short === short)?.tag ?? null
  return [
    entry(one.at, 25, {
      segment,
      kind: 'gauge',
      by: one.by,
      text: `${one.position}: old instrument out, ${one.newSerial} in. ${one.reason}.`,
    }),
    entry(hoursAfter(one.at, 47), 15, {
      segment,
      kind: 'gauge',
      by: one.by,
      text: `${one.newSerial} at ${one.position} checked at its cable and in the register; the old one goes to the cabinet at VB-08.`,
    }),
  ]
}

function isolationEntries(): DemoEntry[] {
  return ISOLATIONS.flatMap(({ segment, fromAt, untilAt }) => {
    if (untilAt === null) return []
    const hours = (untilAt.getTime() - fromAt.getTime()) / 3_600_000
    const [before, after] = [fromAt, hoursAfter(untilAt, -0.01)].map((when) =>
      pressureAt(segment, 'B', when.getTime()),
    )
    if (typeof before !== 'number' || typeof after !== 'number')
      throw new Error(`${segment} has no rise to tell`)
    const short = segmentOf(segment).short
    return [
      entry(fromAt, 10, {
        segment,
        kind: 'test',
        by: 'odalys',
        text: `PV-${short} shut to see the rise over night.`,
      }),
      entry(untilAt, 20, {
        segment,
        kind: 'test',
        by: 'bram',
        text: `PV-${short} open again after ${hours.toFixed(0)} h: rise of ${pa((after - before) / hours)} an hour and nearly straight, as hydrogen from the wall is. Argon flat.`,
      }),
    ]
  })
}

function dipEntries(): DemoEntry[] {
  const tell = (minutes: number, by: PersonKey, segment: string | null, text: string) =>
    entry(hoursAfter(POWER_DIP.at, minutes / 60), 20, { segment, kind: 'note', by, text })
  return [
    tell(
      0,
      'corwin',
      null,
      'Lights went off and on at 09:14. All gauges and ion pumps have tripped, fans are back by themselves.',
    ),
    tell(8, 'corwin', null, 'West logger has started anew and wrote its heading again; east logger went on.'),
    tell(
      25,
      'nerys',
      null,
      'Ion pumps switched on one after the other from the west. Gate valves stayed as they were.',
    ),
    tell(
      66,
      'corwin',
      null,
      'Hot cathodes of all segments back. Everywhere about twice of what it was before, and falling.',
    ),
    tell(75, 'nerys', 'SG-02', 'CC-02 does not strike. HC-02A and HC-02B are well.'),
    tell(
      190,
      'bram',
      null,
      'Getters held while the ion pumps were off, so it is argon and methane that came up. No segment needs a cart.',
    ),
    tell(
      420,
      'corwin',
      null,
      `Down to a tenth above the old values in most segments; SG-09 at ${said('SG-09', 'B', hoursAfter(POWER_DIP.at, 7))}.`,
    ),
  ]
}

/** Things that come round by the calendar, with what was found. */
export function monthlyTries(firstMonth: Date, months: number): DemoEntry[] {
  return Array.from({ length: months }, (_, index) => {
    const month = new Date(firstMonth)
    month.setUTCMonth(month.getUTCMonth() + index)
    const day = month.toISOString().slice(0, 8)
    const gate = SEGMENTS[index % 8]?.short ?? '01'
    const monitor = (index % 12) + 1
    return [
      entry(at(`${day}05 10:10`), 20, {
        segment: null,
        kind: 'test',
        by: pick(['nerys', 'pim'] as const, `gate ${index}`),
        text: `OX-${monitor} tried with test gas: alarm at 19.${4 + (index % 2)} % after ${9 + ((index * 5) % 7)} s, reset by hand.`,
      }),
      entry(at(`${day}18 13:40`), 15, {
        segment: `SG-${gate}`,
        kind: 'valve',
        by: pick(['corwin', 'odalys'] as const, `monitor ${index}`),
        text: `Limit switches of GV-${gate} looked at: both lamps follow, stroke ${(11 + ((index * 3) % 5) / 10).toFixed(1)} s. Left open.`,
      }),
    ]
  }).flat()
}

/** All of them that lie before the last weeks. */
export function eventEntries(): DemoEntry[] {
  return [
    ...LEAKS.flatMap(leakEntries),
    ...VENTS.flatMap(ventEntries),
    ...EXCHANGES.flatMap(exchangeEntries),
    ...isolationEntries(),
    ...dipEntries(),
  ].filter(({ eventAt }) => eventAt < TOLD_SINCE)
}
