/** Isolation points and tests that a permit of the demo asks for. */
import type { PlannedPoint, RequiredTest } from '../../app/domain/permit-content.ts'
import type { DemoSegment } from '../register/segments.ts'
import type { DemoPermit } from '../scenario/permits.ts'
import type { Job } from './jobs.ts'

const SHUT = 'shut'
const BREAKER_OFF = 'breaker off'
const KEY_OUT = 'key withdrawn'

type Draft = Omit<PlannedPoint, 'tag' | 'purpose'> & { purpose?: PlannedPoint['purpose'] }

const valve = (tag: string, isolates = tag): Draft => ({ isolates, required: SHUT, boxed: true })

/** Tags of the gate valves at both ends: GV-04 and GV-05 of SG-05. */
function gates(segments: readonly DemoSegment[]): Draft[] {
  const numbers = segments.flatMap(({ id }) => [id - 1, id])
  return [...new Set(numbers)].map((number) => valve(`GV-${String(number).padStart(2, '0')}`))
}

function drafts({ kind, segments, supply, fromM, toM }: Job): Draft[] {
  const first = segments[0] as DemoSegment
  const last = segments.at(-1) as DemoSegment
  const spur = first.tag === 'SP-1'
  const vents = segments.map(({ short }) => valve(`NV-${short}`, `NV-${short}, vent valve`))
  const crane: Draft = {
    isolates: `Crane over ${Math.floor(fromM)} to ${Math.ceil(toM)} m`,
    required: KEY_OUT,
    boxed: true,
  }
  if (kind === 'blanket') {
    const bars: Draft = {
      isolates: `Feed of the bars of ${first.tag}`,
      required: 'links out, ends covered',
      boxed: true,
    }
    return [...vents, bars, ...(spur ? [] : [crane])]
  }
  const blankets = segments.map(
    ({ short, tag }): Draft => ({
      isolates: `BH-${short}, blankets on valves and cross of ${tag}`,
      required: BREAKER_OFF,
      boxed: true,
    }),
  )
  if (kind === 'trial') return [...vents, ...blankets, crane]
  if (first.tag === 'SG-08') {
    return [
      ...vents,
      ...gates(segments),
      valve('GV-S', 'GV-S, root of the spur'),
      crane,
      {
        isolates: `Output of ${supply}`,
        required: 'locked off, bars earthed',
        boxed: true,
        purpose: 'to-work',
      },
    ]
  }
  const spare = supply === 'HX-2' ? 'HX-1' : 'HX-2'
  const next = String(last.id + 1).padStart(2, '0')
  return [
    ...vents,
    ...gates(segments),
    {
      isolates: `Spare feed of ${spare} to the bars of ${segments.map(({ tag }) => tag).join(' and ')}`,
      required: `link out, end of the ${spare} cable earthed and covered; ${supply} keeps the bars themselves live`,
      boxed: true,
    },
    ...(last.id < 16
      ? [{ isolates: `BH-${next}, blanket next door`, required: BREAKER_OFF, boxed: true }]
      : []),
    crane,
  ]
}

/** Points as the permit lists them. Where the scenario has them in full, its words stand. */
export function plannedPoints(permit: DemoPermit, job: Job): PlannedPoint[] {
  const given = permit.points
  if (given !== undefined) {
    return given.map(({ point, isolates, required }) => ({
      tag: point,
      isolates,
      required,
      purpose: 'to-heat',
      boxed: true,
    }))
  }
  const short = (job.segments[0] as DemoSegment).short
  return drafts(job).map((draft, index) => ({
    purpose: 'to-heat',
    ...draft,
    tag: `IP-${short}-${index + 1}`,
  }))
}

const test = (
  kind: RequiredTest['kind'],
  place: string,
  rest: Partial<Omit<RequiredTest, 'kind' | 'place'>> = {},
): RequiredTest => ({ kind, place, low: null, high: null, unit: '', everyHours: null, ...rest })

/** Tests as the permit asks for them. Limits are the demo site's own. */
export function requiredTests({ kind, segments, supply, celsius }: Job): RequiredTest[] {
  const first = segments[0] as DemoSegment
  const tags = segments.map(({ tag }) => tag).join(' and ')
  const box = first.tag === 'SP-1' ? 'VB-S1' : `VB-${String(first.id - 1).padStart(2, '0')}`
  const always = [
    test('oxygen', `${box}, breathing height`, { low: 19.5, high: 23.5, unit: '%', everyHours: 24 }),
    test('communications', 'both barriers, to the desk', { everyHours: 24 }),
    test('emergency-stop', `both barriers, ${supply} drops out`),
    test('earth-continuity', `${first.tag}, tube to the earthing point`, { high: 0.1, unit: 'Ω' }),
    test('cut-out', 'sensor of the heating, warmed by hand', {
      low: celsius,
      high: celsius + 10,
      unit: '°C',
    }),
  ]
  if (kind === 'blanket') {
    return [...always, test('insulation-resistance', `${supply} to earth`, { low: 1, unit: 'MΩ' })]
  }
  return [
    ...always,
    test('zero-voltage', `bars of ${tags}, both ends`, { high: 1, unit: 'V' }),
    test('joint-resistance', 'worst bolted joint of the bars', { high: 0.05, unit: 'mΩ' }),
    test('earth-fault-monitor', supply),
  ]
}
