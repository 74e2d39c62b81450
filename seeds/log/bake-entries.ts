/** What the crews wrote about the bakes of the past. */
import { pick } from '../readings/noise.ts'
import { pressureAt } from '../readings/pressures.ts'
import { heatingOf } from '../readings/supplies.ts'
import { THERMOCOUPLES, thermocoupleC } from '../readings/temperatures.ts'
import { BAKES, type DemoBake, FAN_STOP } from '../scenario/bakes.ts'
import { type DemoEntry, entry, hoursAfter, pa } from './entry.ts'

const DAY_H = 24

function cross(segment: string, at: Date): string {
  const said = pressureAt(segment, 'B', at.getTime())
  return typeof said === 'number' ? pa(said) : said
}

/** Lowest, highest and spread of a segment's thermocouples, °C. */
function temperatures(segment: string, at: Date) {
  const all = THERMOCOUPLES.filter((one) => one.segment === segment).map((one) => ({
    tag: one.tag,
    celsius: thermocoupleC(one, at.getTime()),
  }))
  const sorted = all.sort((a, b) => a.celsius - b.celsius)
  const [low, high] = [sorted[0], sorted.at(-1)]
  if (low === undefined || high === undefined) throw new Error(`${segment} has no thermocouples`)
  return { low, high, spread: Math.round(high.celsius - low.celsius) }
}

function preparation(bake: DemoBake): DemoEntry[] {
  const { segment, supply, cart, prepAt, cartAt, lead, second } = bake
  return [
    entry(hoursAfter(prepAt, 3), 40, {
      segment,
      kind: 'heat',
      by: lead,
      text: `Contact bars for ${supply} bolted on at both ends, blankets round the valve boxes.`,
    }),
    entry(hoursAfter(prepAt, 27), 30, {
      segment,
      kind: 'test',
      by: second,
      text: `All thermocouples warmed by hand one after the other; each answers at its own channel.`,
    }),
    entry(cartAt, 12, {
      segment,
      kind: 'pump',
      by: lead,
      text: `${cart} takes over at the cross, getter pump valved off. ${cross(segment, hoursAfter(cartAt, 0.2))} at the cross.`,
    }),
  ]
}

function heating(bake: DemoBake): DemoEntry[] {
  const { segment, rampAt, soakAt, lead, second, rampReason } = bake
  const firstCheck = hoursAfter(rampAt, 4)
  const { high } = temperatures(segment, firstCheck)
  const output = heatingOf(segment, firstCheck.getTime())
  const begun = [
    entry(rampAt, 10, {
      segment,
      kind: 'heat',
      by: lead,
      text: `${rampReason}. Cold cathode off, barriers up.`,
    }),
    entry(firstCheck, 15, {
      segment,
      kind: 'round',
      by: second,
      text: `Four hours of ramp: ${high.celsius.toFixed(0)} °C at ${high.tag}, ${output?.amps.toFixed(0)} A, ${cross(segment, firstCheck)}. Bellows move freely.`,
    }),
  ]
  if (soakAt === null) return begun
  return [
    ...begun,
    entry(soakAt, 10, {
      segment,
      kind: 'heat',
      by: second,
      text: `Soak begins at ${heatingOf(segment, soakAt.getTime() + 60_000)?.volts.toFixed(1)} V. ${cross(segment, soakAt)} at the cross.`,
    }),
  ]
}

/** A look at the heated segment every morning of the soak. */
function soakRounds({ segment, soakAt, offAt, lead, second }: DemoBake): DemoEntry[] {
  if (soakAt === null || offAt === null) return []
  const days = Math.floor((offAt.getTime() - soakAt.getTime()) / (DAY_H * 3_600_000))
  return Array.from({ length: days }, (_, index) => {
    const at = hoursAfter(soakAt, DAY_H * (index + 1) - 1)
    const { low, high, spread } = temperatures(segment, at)
    const text = pick(
      [
        `Day ${index + 1} of soak: coolest ${low.tag} with ${low.celsius.toFixed(0)} °C, warmest ${high.tag} with ${high.celsius.toFixed(0)} °C; ${cross(segment, at)}.`,
        `Soak, day ${index + 1}. Spread ${spread} °C, cross at ${cross(segment, at)}, guides dry, no smell of insulation.`,
        `Read all thermocouples in the soak, day ${index + 1}: ${low.celsius.toFixed(0)} to ${high.celsius.toFixed(0)} °C. Pressure ${cross(segment, at)}.`,
      ],
      `${segment} soak ${index}`,
    )
    return entry(at, 20, { segment, kind: 'round', by: index % 2 === 0 ? lead : second, text })
  })
}

const OFF_TEXT: Record<DemoBake['outcome'], (bake: DemoBake, at: Date) => string> = {
  running: ({ supply }) => `${supply} off.`,
  complete: ({ supply, segment }, at) =>
    `A week of soak done, ${supply} off and locked. ${cross(segment, at)} while still hot.`,
  'supply trip': ({ supply, segment }, at) =>
    `${supply} tripped by itself in the ramp at ${temperatures(segment, at).high.celsius.toFixed(0)} °C and does not come back: rectifier. Bake given up, tube left to cool.`,
  spread: ({ supply, segment }, at) => {
    const { low, spread } = temperatures(segment, at)
    return `${low.tag} at ${low.celsius.toFixed(0)} °C, spread ${spread} °C and still growing: insulation has come down. ${supply} off, bake given up.`
  },
}

function ending(bake: DemoBake): DemoEntry[] {
  const { segment, offAt, coldAt, inServiceAt, lead, second, outcome } = bake
  if (offAt === null || coldAt === null || inServiceAt === null) return []
  const { high } = temperatures(segment, coldAt)
  return [
    entry(offAt, 15, { segment, kind: 'heat', by: lead, text: OFF_TEXT[outcome](bake, offAt) }),
    entry(coldAt, 20, {
      segment,
      kind: 'pump',
      by: second,
      text: `Warmest place ${high.celsius.toFixed(0)} °C. Getter activated, segment back on its own pump, cart valved off.`,
    }),
    entry(inServiceAt, 25, {
      segment,
      kind: 'test',
      by: 'bram',
      text: `Handed back: ${cross(segment, inServiceAt)} at the cross. ${outcome === 'complete' ? 'Bake complete.' : 'Bake was not completed.'}`,
    }),
  ]
}

function fanStop(): DemoEntry[] {
  const { segment, fromAt, untilAt } = FAN_STOP
  const lowest = temperatures(segment, untilAt).low
  return [
    entry(fromAt, 10, {
      segment,
      kind: 'heat',
      by: 'nerys',
      text: 'Fan of HX-3 stands still, supply switched off before it gets hot.',
    }),
    entry(untilAt, 10, {
      segment,
      kind: 'heat',
      by: 'corwin',
      text: `Fan exchanged, HX-3 on again. Lowest in between ${lowest.celsius.toFixed(0)} °C at ${lowest.tag}; three hours are added to the soak.`,
    }),
  ]
}

/** Entries of all bakes that are over. */
export function bakeEntries(): DemoEntry[] {
  const past = BAKES.filter(({ outcome }) => outcome !== 'running')
  const all = past.flatMap((bake) => [
    ...preparation(bake),
    ...heating(bake),
    ...soakRounds(bake),
    ...ending(bake),
  ])
  return [...all, ...fanStop()]
}
