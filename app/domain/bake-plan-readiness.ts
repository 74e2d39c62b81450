/**
 * Whether a plan may be signed as ready: steps that the records show, and steps that a person ticks after doing them.
 * What belongs on the list is common practice, no source.
 */

/** Steps ticked by hand; each stays with who ticked it and when. */
export const TICKED_ITEMS = {
  'thermocouples-warmed': 'Each thermocouple warmed by hand, and the right channel moved',
  'insulation-whole': 'Insulation looked over along the whole length, dry and closed',
  'packaging-removed': 'Packaging and anything that burns taken away from the tube',
  'brackets-released': 'Shipping brackets released, bellows free to travel, guides and anchors looked at',
  'bars-torqued': 'Contact bars torqued; resistance end to end and to earth measured',
  'earthing-point-written': 'Earthing point of the heating loop written down',
  'cut-out-tested': 'Over-temperature cut-out tested, and it switched off',
  'elastomers-protected': 'Elastomers, cables and plastics taken off or protected from heat',
  'cart-leak-checked': 'Cart leak-checked before its valve is opened',
  'barriers-up': 'Barriers, signs and lights in place',
  'crew-named': 'Two people named for first energising, ramp and end of soak',
} as const
export type TickedItem = keyof typeof TICKED_ITEMS
export const TICKED_ITEM_KEYS = Object.keys(TICKED_ITEMS) as TickedItem[]

/** What the records say of a plan, as computed by the service. */
export interface PlanFacts {
  segments: readonly SegmentFacts[]
  /** Whether all segments of a pair have one diameter; a sentence where they have not. */
  pairObjection: string | null
  /** Parts that would get hotter than they stand. */
  overheated: readonly { part: string; reachesC: number; limitC: number }[]
  supply: SupplyFacts | null
  /** Highest amperes and volts of the plan. */
  load: { amps: number; volts: number }
  cart: { tag: string; busyOn: string | null } | null
  /** Highest power with the base load, and the highest cap of the day or night it has to fit under, kW. */
  power: { peakKW: number; baseKW: number; capKW: number | null }
  feeders: readonly { name: string; peakKW: number; limitKW: number }[]
  bellows: readonly { segment: string; strokeMm: number; ratedMm: number }[]
  electricians: readonly { name: string; licence: string; endsOn: string | null }[]
  /** Day (YYYY-MM-DD) on which the hot time ends; null while the plan has no start. */
  hotUntilDay: string | null
  predicted: { afterPa: number | null; targetPa: number; stuck: boolean }
  ticks: Readonly<Partial<Record<TickedItem, { done: boolean; by: string; at: Date; note: string }>>>
}

export interface SegmentFacts {
  tag: string
  /** Last leak check on record since the segment was last open; null for none. */
  leakCheckedAt: Date | null
  /** Accepted isolation test since the segment was last open; null for none. */
  isolationTestAt: Date | null
  /** Why an earlier test does not count, such as that it was voided. */
  isolationNote: string
}

interface SupplyFacts {
  tag: string
  maxAmps: number
  maxVolts: number
  /** The plan that heats with it now; null when it is free. */
  busyOn: string | null
}

export interface ReadinessItem {
  key: string
  label: string
  kind: 'computed' | 'ticked'
  met: boolean
  /** An open item of this kind keeps the plan from being signed; the others are for the reader's judgement. */
  blocking: boolean
  detail: string
  at: Date | null
}

/** The whole checklist: what the records show first, then what is ticked. */
export function readiness(facts: PlanFacts): ReadinessItem[] {
  return [
    ...facts.segments.flatMap(segmentItems),
    ...hardwareItems(facts),
    ...powerItems(facts),
    ...electricianItems(facts),
    predictionItem(facts),
    ...TICKED_ITEM_KEYS.map((key) => tickedItem(key, facts)),
  ]
}

/**
 * The items that hang on the tube alone, whatever the plan says of supplies, carts and crews: what a permit for a bake is
 * held against, for the segments and the temperature that the permit itself names.
 */
export function tubeItems({
  segments,
  overheated,
}: Pick<PlanFacts, 'segments' | 'overheated'>): ReadinessItem[] {
  return [...segments.flatMap(segmentItems), partsItem(overheated)]
}

/** Open items that keep a plan from being signed. */
export function blockingItems(items: readonly ReadinessItem[]): ReadinessItem[] {
  return items.filter(({ met, blocking }) => blocking && !met)
}

function computed(
  key: string,
  label: string,
  met: boolean,
  detail: string,
  extra: { blocking?: boolean; at?: Date | null } = {},
): ReadinessItem {
  return { key, label, kind: 'computed', met, blocking: extra.blocking ?? true, detail, at: extra.at ?? null }
}

function segmentItems(segment: SegmentFacts): ReadinessItem[] {
  const { tag, leakCheckedAt, isolationTestAt, isolationNote } = segment
  return [
    computed(
      `leak-checked-${tag}`,
      `${tag} leak-checked`,
      leakCheckedAt !== null,
      leakCheckedAt === null
        ? `The log has no leak check of ${tag} since it was last open. Write one.`
        : 'By the log.',
      { at: leakCheckedAt },
    ),
    computed(
      `isolation-test-${tag}`,
      `${tag} has an accepted isolation test`,
      isolationTestAt !== null,
      isolationTestAt === null
        ? `${tag} has no accepted isolation test since it was last open${isolationNote === '' ? '' : ` (${isolationNote})`}. Record one and have an engineer accept it.`
        : 'Accepted by an engineer.',
      { at: isolationTestAt },
    ),
  ]
}

function hardwareItems({
  pairObjection,
  overheated,
  supply,
  load,
  cart,
  segments,
  bellows,
}: PlanFacts): ReadinessItem[] {
  const short = bellows.filter(({ strokeMm, ratedMm }) => strokeMm > ratedMm)
  return [
    ...(segments.length > 1
      ? [
          computed(
            'same-diameter',
            'Segments of the pair have one diameter',
            pairObjection === null,
            pairObjection ?? 'They have.',
          ),
        ]
      : []),
    partsItem(overheated),
    computed(
      'joints-within-stroke',
      'Joints stay within their rated stroke',
      short.length === 0,
      short.length === 0
        ? bellows
            .map((one) => `${one.segment}: ${one.strokeMm.toFixed(1)} mm of ${one.ratedMm} mm a joint`)
            .join('; ')
        : short
            .map((one) => `${one.segment} needs ${one.strokeMm.toFixed(1)} mm a joint and has ${one.ratedMm}`)
            .join('; '),
    ),
    supplyItem(supply, load),
    computed(
      'cart-named',
      'Pumping cart named and free',
      cart !== null && cart.busyOn === null,
      cart === null
        ? 'No cart is named. Choose one in a new version.'
        : cart.busyOn === null
          ? `${cart.tag} is free.`
          : `${cart.tag} works on ${cart.busyOn}. Name another, or wait until it is free.`,
    ),
  ]
}

function partsItem(overheated: PlanFacts['overheated']): ReadinessItem {
  const hot = overheated.map(
    ({ part, reachesC, limitC }) =>
      `${part} would reach ${reachesC.toFixed(0)} °C of ${limitC.toFixed(0)} allowed`,
  )
  return computed(
    'parts-within-limits',
    'Every part stays below its limit',
    hot.length === 0,
    hot.length === 0
      ? 'By each part’s own predicted temperature.'
      : `${hot.join('; ')}. Bake cooler, or take the part off.`,
  )
}

function supplyItem(supply: SupplyFacts | null, { amps, volts }: PlanFacts['load']): ReadinessItem {
  const label = 'Supply set named, free and strong enough'
  if (supply === null)
    return computed('supply', label, false, 'No supply set is named. Choose one in a new version.')
  const wants = `${amps.toFixed(0)} A and ${volts.toFixed(1)} V at the end of the ramp`
  const gives = `${supply.tag} gives ${supply.maxAmps.toFixed(0)} A and ${supply.maxVolts.toFixed(0)} V`
  if (amps > supply.maxAmps || volts > supply.maxVolts) {
    return computed(
      'supply',
      label,
      false,
      `The plan wants ${wants}; ${gives}. Ramp slower, bake cooler, or take one segment at a time.`,
    )
  }
  if (supply.busyOn !== null) {
    return computed(
      'supply',
      label,
      false,
      `${supply.tag} heats ${supply.busyOn}. Name another, or wait until it is free.`,
    )
  }
  return computed('supply', label, true, `${gives}; the plan wants ${wants}.`)
}

function powerItems({ power, feeders }: PlanFacts): ReadinessItem[] {
  const whole = power.peakKW + power.baseKW
  const sum = `${power.peakKW.toFixed(0)} kW at the end of the ramp and ${power.baseKW.toFixed(0)} kW of base load make ${whole.toFixed(0)} kW`
  const over = feeders.filter(({ peakKW, limitKW }) => peakKW > limitKW)
  return [
    computed(
      'power-cap',
      'Fits under the power cap by itself',
      power.capKW === null || whole <= power.capKW,
      power.capKW === null
        ? 'The register has no power cap.'
        : `${sum}; the higher cap is ${power.capKW.toFixed(0)} kW. Other bakes at the same time are the schedule's business.`,
    ),
    ...(feeders.length === 0
      ? []
      : [
          computed(
            'feeder',
            'Fits on its feeder by itself',
            over.length === 0,
            feeders
              .map((one) => `${one.name}: ${one.peakKW.toFixed(0)} of ${one.limitKW.toFixed(0)} kW`)
              .join('; '),
          ),
        ]),
  ]
}

function electricianItems({ electricians, hotUntilDay }: PlanFacts): ReadinessItem[] {
  const label = 'A licensed electrician for the whole hot time'
  if (electricians.length === 0) {
    return [
      computed(
        'electrician',
        label,
        false,
        'No electrician’s licence has been entered. A safety officer or the administrator does so under Competences.',
      ),
    ]
  }
  if (hotUntilDay === null) {
    const dates = electricians.map(
      ({ name, endsOn }) => `${name}${endsOn === null ? '' : ` until ${endsOn}`}`,
    )
    return [
      computed(
        'electrician',
        label,
        true,
        `The plan has no start yet, so licences cannot be held against it: ${dates.join(', ')}.`,
        {
          blocking: false,
        },
      ),
    ]
  }
  const covering = electricians.filter(({ endsOn }) => endsOn === null || endsOn >= hotUntilDay)
  const detail =
    covering.length > 0
      ? covering.map(({ name, licence }) => `${name}, licence ${licence}`).join('; ')
      : `${electricians.map(({ name, licence, endsOn }) => `${name}'s licence ${licence} ends on ${endsOn}`).join('; ')}, and the tube is hot until ${hotUntilDay}. Name a second electrician, renew the licence or move the bake.`
  return [computed('electrician', label, covering.length > 0, detail)]
}

function predictionItem({ predicted }: PlanFacts): ReadinessItem {
  const label = 'The prediction meets the target'
  const soft = { blocking: false }
  if (predicted.stuck) {
    return computed(
      'prediction',
      label,
      false,
      'The ramp is not expected to get past its hold limit. Ramp slower, or look for a leak.',
      soft,
    )
  }
  if (predicted.afterPa === null) {
    return computed(
      'prediction',
      label,
      false,
      'The register lacks what the model needs (hydrogen content, pump speed).',
      soft,
    )
  }
  const { afterPa, targetPa } = predicted
  return computed(
    'prediction',
    label,
    afterPa <= targetPa,
    `${afterPa.toExponential(1)} Pa expected at the worst end, target ${targetPa.toExponential(1)} Pa. Diffusion in steel is known to a factor of about two.`,
    soft,
  )
}

function tickedItem(key: TickedItem, { ticks }: PlanFacts): ReadinessItem {
  const tick = ticks[key]
  const met = tick?.done ?? false
  const by = tick === undefined ? '' : `${tick.done ? 'Ticked' : 'Taken back'} by ${tick.by}`
  const note = tick === undefined || tick.note === '' ? '' : `: ${tick.note}`
  return {
    key,
    label: TICKED_ITEMS[key],
    kind: 'ticked',
    met,
    blocking: true,
    detail: `${by}${note}`,
    at: tick?.at ?? null,
  }
}
