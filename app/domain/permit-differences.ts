/** What a permit says, field by field in words, and where two versions of it part. */
import type { PermitContent } from './permit-content.ts'
import {
  HAZARD_KEYS,
  HAZARD_LABELS,
  PERMIT_TEST_LABELS,
  type PermitSection,
  type PointPurpose,
} from './permit-words.ts'

/** How ids and instants are written for the reader. */
export interface PermitWording {
  person: (id: number) => string
  /** An instant as UTC ISO 8601. */
  time: (iso: string) => string
}

export interface PermitLine {
  /** The same for the same thing in two versions. */
  key: string
  section: PermitSection
  label: string
  /** Empty where nothing is said. */
  text: string
}

export interface PermitDifference {
  section: PermitSection
  label: string
  /** Empty where the version says nothing about it. */
  before: string
  after: string
}

const PURPOSES: Record<PointPurpose, string> = {
  'to-heat': 'so that it can be heated',
  'to-work': 'so that somebody can work',
}

/** Differences in the order of the form's sections. Empty where both say the same. */
export function permitDifferences(
  before: PermitContent,
  after: PermitContent,
  wording: PermitWording,
): PermitDifference[] {
  const old = permitLines(before, wording)
  const now = permitLines(after, wording)
  const gone = old.filter(({ key }) => !now.some((line) => line.key === key))
  const differences: PermitDifference[] = []
  for (const { key, section, label, text } of now) {
    const was = old.find((line) => line.key === key)?.text ?? ''
    if (was !== text) differences.push({ section, label, before: was, after: text })
  }
  for (const { section, label, text } of gone) {
    if (text !== '') differences.push({ section, label, before: text, after: '' })
  }
  return differences
}

/** Everything that a permit says, one line a field, in the order of the form's sections. */
export function permitLines(content: PermitContent, wording: PermitWording): PermitLine[] {
  return [
    ...identityLines(content),
    ...placeLines(content),
    ...workLines(content),
    ...peopleLines(content, wording),
    ...validityLines(content, wording),
    ...hazardLines(content),
    ...pointLines(content),
    ...testLines(content),
    ...protectionLines(content),
  ]
}

function lineOf(section: PermitSection): (key: string, label: string, text: string) => PermitLine {
  return (key, label, text) => ({ key: `${section}:${key}`, section, label, text })
}

/** A figure with its unit, without a tail of zeros; empty where there is none. */
function figure(value: number | null, unit: string): string {
  return value === null ? '' : `${Number(value.toFixed(3))} ${unit}`
}

function identityLines(content: PermitContent): PermitLine[] {
  const line = lineOf('identity')
  const { planId, planVersion } = content
  const plan =
    planId === null ? '' : `plan ${planId}${planVersion === null ? '' : `, version ${planVersion}`}`
  return [
    line('title', 'Title', content.title),
    line(
      'related',
      'Related papers',
      content.related.map(({ kind, number }) => `${kind} ${number}`).join(', '),
    ),
    line('plan', 'Bake plan', plan),
  ]
}

function placeLines(content: PermitContent): PermitLine[] {
  const line = lineOf('place')
  const { fromM, toM } = content
  const stretch = fromM === null || toM === null ? '' : `${figure(fromM, 'm')} to ${figure(toM, 'm')}`
  return [
    line('segments', 'Segments', content.segments.join(' + ')),
    line('stretch', 'Stretch', stretch),
    line('bays', 'Bays', content.bays),
    line('west', 'Kept clear to the west', figure(content.exclusionWestM, 'm')),
    line('east', 'Kept clear to the east', figure(content.exclusionEastM, 'm')),
    line('equipment', 'Equipment', content.equipment.join(', ')),
  ]
}

function workLines(content: PermitContent): PermitLine[] {
  const line = lineOf('work')
  const { annex, unattended } = content
  const alone = unattended === null ? '' : unattended ? 'yes' : 'no'
  return [
    line('work', 'Work', content.work),
    line('not-included', 'Not included', content.notIncluded),
    line('celsius', 'Highest temperature', figure(content.maxCelsius, '°C')),
    line('ramp', 'Fastest ramp', figure(content.rampKH, '°C/h')),
    line('soak', 'Soak', figure(content.soakHours, 'h')),
    line('supply', 'Supply set', content.supply ?? ''),
    line('amps', 'Highest current', figure(content.maxAmps, 'A')),
    line('volts', 'Highest voltage under load', figure(content.maxVolts, 'V')),
    line('open-volts', 'Open-circuit voltage', figure(content.openCircuitVolts, 'V')),
    line('earthing', 'Earthing', content.earthing),
    line('unattended', 'Heated with nobody at the segment', alone),
    line('night', 'Night cover', content.nightCover),
    line('alarms', 'Annex: alarms', annex.alarms),
    line('on-call', 'Annex: on call within', figure(annex.onCallMinutes, 'min')),
    line('shut-off', 'Annex: automatic shut-off', annex.shutOff),
  ]
}

function peopleLines(content: PermitContent, { person }: PermitWording): PermitLine[] {
  const line = lineOf('people')
  const one = (id: number | null) => (id === null ? '' : person(id))
  const several = (ids: readonly number[]) => ids.map(person).join(', ')
  return [
    line('holder', 'Holder', one(content.holderId)),
    line('deputies', 'Deputies', several(content.deputyIds)),
    line('crew', 'Crew', several(content.crewIds)),
    line('isolating', 'Isolating person', one(content.isolatingPersonId)),
    line('electrician', 'Electrician', one(content.electricianId)),
    line('attendant', 'Attendant and fire watch', one(content.attendantId)),
  ]
}

function validityLines(content: PermitContent, { time }: PermitWording): PermitLine[] {
  const line = lineOf('validity')
  return [
    line('from', 'Window from', content.from === null ? '' : time(content.from)),
    line('to', 'Window to', content.to === null ? '' : time(content.to)),
    line('shifts', 'Shifts', content.shifts),
  ]
}

function hazardLines(content: PermitContent): PermitLine[] {
  const line = lineOf('hazards')
  return HAZARD_KEYS.flatMap((key) => {
    const answer = content.hazards[key]
    if (answer === undefined || (answer.applies === null && answer.text === '')) return []
    const head = answer.applies === null ? 'not answered' : answer.applies ? 'applies' : 'does not apply'
    return [line(key, HAZARD_LABELS[key], answer.text === '' ? head : `${head}: ${answer.text}`)]
  })
}

function pointLines(content: PermitContent): PermitLine[] {
  const line = lineOf('isolation')
  return content.points.map(({ tag, isolates, required, purpose, boxed }) =>
    line(
      tag,
      `Point ${tag}`,
      `${isolates}: ${required}, ${PURPOSES[purpose]}${boxed ? ', keys in the lock box' : ''}`,
    ),
  )
}

function testLines(content: PermitContent): PermitLine[] {
  const line = lineOf('tests')
  return content.tests.map(({ kind, place, low, high, unit, everyHours }) => {
    const limits =
      low !== null && high !== null
        ? `${low} to ${high} ${unit}`
        : low !== null
          ? `at least ${low} ${unit}`
          : high !== null
            ? `at most ${high} ${unit}`
            : 'passed or not'
    const again = everyHours === null ? 'once before acceptance' : `again every ${everyHours} h`
    const where = place === '' ? '' : ` at ${place}`
    return line(`${kind}@${place}`, `Test: ${PERMIT_TEST_LABELS[kind]}${where}`, `${limits.trim()}, ${again}`)
  })
}

function protectionLines(content: PermitContent): PermitLine[] {
  const line = lineOf('protection')
  return [
    line('equipment', 'Protective equipment', content.protectiveEquipment),
    line('barriers', 'Barriers', content.barriers),
    line('signs', 'Signs', content.signs),
    line('lighting', 'Lighting', content.lighting),
    line('rescue', 'Rescue', content.rescue),
    line('assembly', 'Assembly point', content.assemblyPoint),
    line(
      'contacts',
      'Whom to call',
      content.contacts
        .map(({ role, name, phone }) => `${role}${name === '' ? '' : `, ${name}`}: ${phone}`)
        .join('; '),
    ),
  ]
}
