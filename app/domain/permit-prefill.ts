/**
 * What a new permit starts from. Places, limits, points and tests come from a bake plan and the register; people,
 * answers to hazards and everything that somebody has to have thought about stay empty. Which points are proposed is
 * common practice, no source; the requester strikes out and adds.
 */
import {
  emptyPermitContent,
  LONGEST_WINDOW_HOURS,
  type PermitContent,
  type PlannedPoint,
  type RequiredTest,
} from './permit-content.ts'
import type { PermitTestKind } from './permit-words.ts'
import type { ValveKind } from './register.ts'

/** Metres to which people keep away from a heated segment until somebody says otherwise: this product's own choice. */
const USUAL_EXCLUSION_M = 10
const HOUR_MS = 3_600_000
const MINUTE_MS = 60_000

export interface PrefillSegment {
  tag: string
  line: string
  startM: number
  endM: number
  /** Blanket and direct-current circuits of the segment itself. */
  circuits: readonly { tag: string; kind: 'blanket' | 'direct-current'; earthing: string }[]
}

/** What the register says of the place. */
export interface PrefillGround {
  /** One segment, or two in series, in order along the line. */
  segments: readonly PrefillSegment[]
  /** Segments that touch them, with their blankets. */
  neighbours: readonly { tag: string; blankets: readonly string[] }[]
  /** Vent and gate valves of the segments, those at both ends included. */
  valves: readonly { tag: string; kind: ValveKind; between: readonly string[] }[]
  supply: { tag: string; openCircuitVolts: number } | null
}

/** The heat that is meant. Null where nobody has said. */
export interface PrefillHeat {
  celsius: number | null
  rampKH: number | null
  soakHours: number | null
  /** At the end of the ramp, by the model of the register's figures. */
  amps: number | null
  volts: number | null
}

export interface PrefillPlan {
  id: number
  version: number
  title: string
  cart: string | null
  /** Which permit of the plan's chain. */
  link: { number: number; of: number }
  from: Date | null
  to: Date | null
  /** What the checklist of the plan says of the earthing point; empty for nothing. */
  earthing: string
}

/** The content that a new permit starts with. */
export function prefilledContent(
  ground: PrefillGround,
  heat: PrefillHeat,
  plan: PrefillPlan | null,
): PermitContent {
  const [first] = ground.segments
  if (first === undefined) return emptyPermitContent()
  const fromM = Math.min(...ground.segments.map(({ startM }) => startM))
  const toM = Math.max(...ground.segments.map(({ endM }) => endM))
  return {
    ...emptyPermitContent(),
    title: titleOf(ground, plan),
    planId: plan?.id ?? null,
    planVersion: plan?.version ?? null,
    segments: ground.segments.map(({ tag }) => tag),
    fromM,
    toM,
    bays: `${first.line}, ${fromM} to ${toM} m`,
    exclusionWestM: USUAL_EXCLUSION_M,
    exclusionEastM: USUAL_EXCLUSION_M,
    equipment: equipmentOf(ground, plan),
    work: workOf(ground, heat, plan),
    maxCelsius: heat.celsius,
    rampKH: heat.rampKH,
    soakHours: heat.soakHours,
    supply: ground.supply?.tag ?? null,
    maxAmps: heat.amps === null ? null : Math.ceil(heat.amps),
    maxVolts: heat.volts === null ? null : Math.ceil(heat.volts * 10) / 10,
    openCircuitVolts: ground.supply?.openCircuitVolts ?? null,
    earthing: (plan?.earthing || earthingOf(ground)).slice(0, 200),
    ...windowOf(plan),
    points: proposedPoints(ground, { fromM, toM }),
    tests: proposedTests(ground),
  }
}

function namesOf({ segments }: PrefillGround): string {
  return segments.map(({ tag }) => tag).join(' + ')
}

function titleOf(ground: PrefillGround, plan: PrefillPlan | null): string {
  if (plan === null) return `Heating of ${namesOf(ground)}`
  const { number, of } = plan.link
  return of < 2 ? plan.title : `${plan.title}, permit ${number} of ${of}`
}

function workOf(ground: PrefillGround, heat: PrefillHeat, plan: PrefillPlan | null): string {
  if (heat.celsius === null) return ''
  const parts = [
    `Heating of ${namesOf(ground)} to at most ${heat.celsius} °C`,
    heat.rampKH === null ? '' : `ramp of at most ${heat.rampKH} °C/h`,
    heat.soakHours === null ? '' : `soak of ${heat.soakHours} h`,
    plan === null ? '' : `as in version ${plan.version} of the bake plan`,
  ]
  const text = `${parts.filter((part) => part !== '').join(', ')}.`
  if (plan === null || plan.link.of < 2) return text
  return `${text} This is permit ${plan.link.number} of ${plan.link.of} in a chain: the bake is longer than one permit may cover.`
}

/** The supply and cart, the segments' own circuits and their valves. */
function equipmentOf({ segments, valves, supply }: PrefillGround, plan: PrefillPlan | null): string[] {
  const circuits = segments.flatMap(({ circuits: own }) =>
    own.filter(({ kind }) => kind === 'blanket' || supply !== null).map(({ tag }) => tag),
  )
  const all = [supply?.tag, plan?.cart, ...circuits, ...valves.map(({ tag }) => tag)]
  return [...new Set(all.filter((tag) => tag !== undefined && tag !== null && tag !== ''))] as string[]
}

function earthingOf({ segments, supply }: PrefillGround): string {
  if (supply === null) return ''
  const found = segments.flatMap(({ tag, circuits }) =>
    circuits.filter(({ earthing }) => earthing !== '').map(({ earthing }) => ({ tag, earthing })),
  )
  return segments.length === 1
    ? (found[0]?.earthing ?? '')
    : found.map(({ tag, earthing }) => `${tag}: ${earthing}`).join('; ')
}

/** To the minute, the end never later than the longest window allows. */
function windowOf(plan: PrefillPlan | null): { from: string | null; to: string | null } {
  if (plan === null || plan.from === null || plan.to === null) return { from: null, to: null }
  const from = Math.floor(plan.from.getTime() / MINUTE_MS) * MINUTE_MS
  const to = Math.min(
    Math.ceil(plan.to.getTime() / MINUTE_MS) * MINUTE_MS,
    from + LONGEST_WINDOW_HOURS * HOUR_MS,
  )
  return { from: new Date(from).toISOString(), to: new Date(to).toISOString() }
}

function proposedPoints(ground: PrefillGround, stretch: { fromM: number; toM: number }): PlannedPoint[] {
  const { segments, neighbours, valves, supply } = ground
  const own = segments.map(({ tag }) => tag)
  const named = namesOf(ground)
  const wanted: [isolates: string, required: string][] = [
    ...valves
      .filter(({ kind }) => kind === 'vent')
      .map(({ tag }): [string, string] => [`${tag}, vent valve`, 'Shut and locked']),
    ...valves
      .filter(({ kind }) => kind === 'gate')
      .map(({ tag, between }): [string, string] =>
        between.length > 1 && between.every((side) => own.includes(side))
          ? [`${tag}, gate valve inside the pair`, 'Locked in the position that the plan names']
          : [`${tag}, gate valve`, 'Shut and locked'],
      ),
    ...(supply === null
      ? []
      : [
          [
            `Spare feeds to the bars of ${named}, all but ${supply.tag}`,
            'Links taken out, cable ends earthed and covered',
          ] as [string, string],
        ]),
    ...neighbours.flatMap(({ tag, blankets }) =>
      blankets.map((blanket): [string, string] => [
        `${blanket}, blanket of ${tag} next door`,
        'Breaker off and locked',
      ]),
    ),
    [`Crane over ${stretch.fromM} to ${stretch.toM} m`, 'Key withdrawn'],
  ]
  const stem = `IP-${(own[0] ?? '').replace(/^[A-Za-z]+-/, '')}`
  return wanted.map(([isolates, required], index) => ({
    tag: `${stem}-${index + 1}`,
    isolates,
    required,
    purpose: 'to-heat',
    boxed: true,
  }))
}

function once(kind: PermitTestKind, place: string): RequiredTest {
  return { kind, place, low: null, high: null, unit: '', everyHours: null }
}

/**
 * Oxygen between 19.5 and 23.5 %: below counts as deficient and above as enriched in 29 CFR 1910.146(b), from memory,
 * not verified; what this site has adopted stands on the page of thresholds, and the requester may write it in.
 */
function proposedTests(ground: PrefillGround): RequiredTest[] {
  const named = namesOf(ground)
  const electrical = ground.segments.flatMap(({ tag }) => [
    once('zero-voltage', `Bars of ${tag}, before anybody works on them`),
    once('earth-continuity', `${tag}, tube to earth`),
    once('joint-resistance', `Bolted joints of the bars of ${tag}`),
  ])
  return [
    { kind: 'oxygen', place: `Bay of ${named}`, low: 19.5, high: 23.5, unit: '%', everyHours: 12 },
    ...(ground.supply === null ? [] : electrical),
    ...(ground.supply === null ? [] : [once('earth-fault-monitor', `${ground.supply.tag}`)]),
    once('cut-out', `Over-temperature cut-out of ${named}`),
    once('emergency-stop', `Emergency stop at ${named}`),
    { ...once('communications', `Radio and call point at ${named}`), everyHours: 12 },
  ]
}
