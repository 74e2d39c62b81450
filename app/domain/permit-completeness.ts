/**
 * What a permit must say before an officer is asked for it. A draft may lack anything; a request may lack nothing of
 * this. Whether what it says is right is for the officer and for the rules of domain/permits.ts.
 */
import { LONGEST_WINDOW_HOURS, type PermitContent } from './permit-content.ts'
import type { MissingPart } from './permit-facts.ts'
import {
  HAZARD_LABELS,
  type HazardKey,
  PERMIT_SECTIONS,
  PERMIT_TEST_LABELS,
  type PermitSection,
  type PermitTestKind,
} from './permit-words.ts'

const HOUR_MS = 3_600_000

/** Fields that hold a text or a list, and what is said where they hold nothing. */
type Texts = {
  [Key in keyof PermitContent]: PermitContent[Key] extends string ? Key : never
}[keyof PermitContent]
type Numbers = {
  [Key in keyof PermitContent]: PermitContent[Key] extends number | null ? Key : never
}[keyof PermitContent]

const NEEDED_TEXTS: readonly (readonly [PermitSection, Texts, string])[] = [
  ['identity', 'title', 'Give the permit a title.'],
  ['place', 'bays', 'Name the bays of the tunnel.'],
  ['work', 'work', 'Say what will be done.'],
  ['work', 'notIncluded', 'Say what is not part of the work.'],
  ['validity', 'shifts', 'Say which shifts are covered.'],
  ['protection', 'protectiveEquipment', 'Say what people wear.'],
  ['protection', 'barriers', 'Say where the barriers stand.'],
  ['protection', 'signs', 'Say which signs are put up.'],
  ['protection', 'lighting', 'Say how the place is lit.'],
  ['protection', 'rescue', 'Say how somebody is got out and who does it.'],
  ['protection', 'assemblyPoint', 'Name the assembly point.'],
]

const NEEDED_NUMBERS: readonly (readonly [PermitSection, Numbers, string])[] = [
  ['place', 'fromM', 'Say at which chainage the heated stretch begins.'],
  ['place', 'toM', 'Say at which chainage the heated stretch ends.'],
  ['place', 'exclusionWestM', 'Say how far people keep away on the west side.'],
  ['place', 'exclusionEastM', 'Say how far people keep away on the east side.'],
  ['work', 'maxCelsius', 'Give the highest temperature.'],
  ['work', 'rampKH', 'Give the ramp in °C/h.'],
  ['work', 'soakHours', 'Give the length of the soak; 0 for none.'],
  ['people', 'holderId', 'Name the permit holder.'],
  ['people', 'isolatingPersonId', 'Name the isolating person.'],
]

/** What heating with electricity needs to be told besides. */
const NEEDED_FOR_SUPPLY: readonly (readonly [PermitSection, Numbers, string])[] = [
  ['work', 'maxAmps', 'Give the highest current.'],
  ['work', 'maxVolts', 'Give the highest voltage under load.'],
  ['work', 'openCircuitVolts', 'Give the open-circuit voltage: it stands wherever the circuit opens.'],
  ['people', 'electricianId', 'Name the electrician.'],
]

/** Tests without which nothing is heated, and why. */
const ALWAYS_TESTED: readonly (readonly [PermitTestKind, string])[] = [
  ['cut-out', 'heating must end by itself when it gets too hot'],
  ['emergency-stop', 'whoever is there must be able to stop it'],
  ['communications', 'help must be in reach from the place'],
]
const TESTED_WITH_SUPPLY: readonly (readonly [PermitTestKind, string])[] = [
  ['zero-voltage', 'connections are made on dead parts only'],
  ['earth-continuity', 'a fault to the tube must find its way to earth'],
]

/**
 * What the sections still lack, in the order of the form.
 *
 * @param hazardKeys hazards that have to be answered for these segments
 */
export function missingParts(content: PermitContent, hazardKeys: readonly HazardKey[]): MissingPart[] {
  const missing = [
    ...NEEDED_TEXTS.filter(([, field]) => content[field].trim() === ''),
    ...NEEDED_NUMBERS.filter(([, field]) => content[field] === null),
    ...(content.supply === null ? [] : NEEDED_FOR_SUPPLY.filter(([, field]) => content[field] === null)),
  ].map(([section, field, text]): MissingPart => ({ section, field, text }))
  missing.push(
    ...placeLacks(content),
    ...workLacks(content),
    ...peopleLack(content),
    ...validityLacks(content),
    ...hazardsLack(content, hazardKeys),
    ...pointsLack(content),
    ...testsLack(content),
  )
  if (content.contacts.length === 0) {
    missing.push(part('protection', 'contacts', 'Give at least one telephone number for an emergency.'))
  }
  return PERMIT_SECTIONS.flatMap((section) => missing.filter((each) => each.section === section))
}

function part(section: PermitSection, field: string, text: string): MissingPart {
  return { section, field, text }
}

function placeLacks({ segments, fromM, toM, equipment }: PermitContent): MissingPart[] {
  const lacks: MissingPart[] = []
  if (segments.length === 0) lacks.push(part('place', 'segments', 'Name the segment that is heated.'))
  if (new Set(segments).size < segments.length) {
    lacks.push(part('place', 'segments', `${segments[0]} is named twice. Name two segments, or one.`))
  }
  if (fromM !== null && toM !== null && toM <= fromM) {
    lacks.push(part('place', 'toM', `The stretch ends at ${toM} m, not beyond its beginning at ${fromM} m.`))
  }
  if (equipment.length === 0) lacks.push(part('place', 'equipment', 'Name the equipment by its tags.'))
  return lacks
}

function workLacks({ unattended, annex, nightCover, supply, earthing }: PermitContent): MissingPart[] {
  const lacks: MissingPart[] = []
  if (supply !== null && earthing.trim() === '') {
    lacks.push(part('work', 'earthing', 'Say where the circuit is earthed.'))
  }
  if (unattended === null) {
    lacks.push(part('work', 'unattended', 'Say whether heating goes on with nobody at the segment.'))
  }
  if (unattended !== true) return lacks
  const why = 'Heating without anybody there needs the annex'
  if (nightCover.trim() === '') lacks.push(part('work', 'nightCover', 'Say who covers nights and weekends.'))
  if (annex.alarms.trim() === '') lacks.push(part('work', 'annex.alarms', `${why}: name the alarms.`))
  if (annex.onCallMinutes === null) {
    lacks.push(
      part('work', 'annex.onCallMinutes', `${why}: say within how many minutes the on-call pair is there.`),
    )
  }
  if (annex.shutOff.trim() === '') {
    lacks.push(part('work', 'annex.shutOff', `${why}: say what shuts the heating off by itself.`))
  }
  return lacks
}

/** Whether heating may go on unattended: the annex says all it has to. */
export function annexComplete({ unattended, annex, nightCover }: PermitContent): boolean {
  return (
    unattended === true &&
    [annex.alarms, annex.shutOff, nightCover].every((text) => text.trim() !== '') &&
    annex.onCallMinutes !== null
  )
}

function peopleLack({ holderId, deputyIds, crewIds }: PermitContent): MissingPart[] {
  const others = [...deputyIds, ...crewIds].filter((id) => id !== holderId)
  return others.length > 0
    ? []
    : [part('people', 'crewIds', 'Name at least one person besides the holder: nobody does this alone.')]
}

function validityLacks({ from, to }: PermitContent): MissingPart[] {
  const lacks: MissingPart[] = []
  if (from === null) lacks.push(part('validity', 'from', 'Say when the window begins.'))
  if (to === null) lacks.push(part('validity', 'to', 'Say when the window ends.'))
  if (from === null || to === null) return lacks
  const fault = windowFault(new Date(from), new Date(to))
  return fault === null ? lacks : [...lacks, part('validity', 'to', fault)]
}

/**
 * What is wrong with a window, or null. Hours are elapsed hours, so a night of 23 or 25 hours counts as it was.
 */
export function windowFault(from: Date, to: Date): string | null {
  const hours = (to.getTime() - from.getTime()) / HOUR_MS
  if (hours <= 0) return 'The window ends before it begins. Give an end after the start.'
  if (hours <= LONGEST_WINDOW_HOURS) return null
  const length = Number(hours.toFixed(1))
  return `The window is ${length} elapsed hours long; at most ${LONGEST_WINDOW_HOURS} can be approved. Shorten it, or ask for a chain of permits.`
}

function hazardsLack({ hazards }: PermitContent, keys: readonly HazardKey[]): MissingPart[] {
  return keys.flatMap((key): MissingPart[] => {
    const answer = hazards[key]
    const label = HAZARD_LABELS[key]
    if (answer === undefined || answer.applies === null) {
      return [part('hazards', `hazards.${key}.applies`, `${label}: say whether it applies here.`)]
    }
    return answer.applies || answer.text.trim() !== ''
      ? []
      : [part('hazards', `hazards.${key}.text`, `${label}: say why it does not apply here.`)]
  })
}

function pointsLack({ points }: PermitContent): MissingPart[] {
  if (!points.some(({ purpose }) => purpose === 'to-heat')) {
    const text = 'List what is locked so that the segment can be heated, the vent valve for one.'
    return [part('isolation', 'points', text)]
  }
  const tags = points.map(({ tag }) => tag.toUpperCase())
  const twice = tags.find((tag, i) => tags.indexOf(tag) !== i)
  return twice === undefined
    ? []
    : [part('isolation', 'points', `${twice} is listed twice. Each isolation point has a tag of its own.`)]
}

function testsLack({ tests, supply, hazards }: PermitContent): MissingPart[] {
  const listed = new Set(tests.map(({ kind }) => kind))
  const needed: (readonly [PermitTestKind, string])[] = [
    ...ALWAYS_TESTED,
    ...(supply === null ? [] : TESTED_WITH_SUPPLY),
    ...(hazards.oxygen?.applies === true ? ([['oxygen', 'too little of it gives no warning']] as const) : []),
  ]
  return needed
    .filter(([kind]) => !listed.has(kind))
    .map(([kind, why]) => part('tests', 'tests', `${PERMIT_TEST_LABELS[kind]}: list this test, ${why}.`))
}
