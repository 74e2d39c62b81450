/** What the demo's permits say, in full. */
import { emptyPermitContent, type PermitContent } from '../../app/domain/permit-content.ts'
import { HAZARD_KEYS, type HazardKey } from '../../app/domain/permit-words.ts'
import { PERSON_ID } from '../people.ts'
import type { DemoSegment } from '../register/segments.ts'
import type { DemoPermit } from '../scenario/permits.ts'
import { peopleOf } from './crews.ts'
import { type Job, jobOf } from './jobs.ts'
import { plannedPoints, requiredTests } from './points.ts'

/** From so many hours on heating goes over night with nobody at the segment. */
const DAY_SHIFT_HOURS = 12
const EXCLUSION_M = 10
/** The demo site's assembly point and numbers; the numbers are invented and lead nowhere. */
const ASSEMBLY = 'Gravel yard outside the west portal'
const CONTACTS: PermitContent['contacts'] = [
  { role: 'Emergency, fire and rescue', name: 'Laboratory desk', phone: '7-000' },
  { role: 'Pair on call, vacuum', name: 'see roster', phone: '7-114' },
  { role: 'Safety officer', name: 'Ione Castellbrook', phone: '7-120' },
  { role: 'Deputy from 18:00', name: 'Rafe Moonthorn', phone: '7-121' },
  { role: 'Electrician', name: 'Wendel Quarrie', phone: '7-140' },
]

const hours = (fromAt: Date, untilAt: Date) => (untilAt.getTime() - fromAt.getTime()) / 3_600_000

type Answer = { applies: boolean; text: string }
const yes = (text: string): Answer => ({ applies: true, text })
const no = (text: string): Answer => ({ applies: false, text })

function answers(job: Job, unattended: boolean): Record<HazardKey, Answer> {
  const { kind, segments, celsius, supply, fromM, toM } = job
  const first = segments[0] as DemoSegment
  const tags = segments.map(({ tag }) => tag).join(' and ')
  const wired = kind !== 'blanket'
  const elastomer = segments.some(({ id }) => [4, 5, 8, 9, 12, 13].includes(id)) || first.tag === 'SP-1'
  return {
    'hot-surface': yes(
      kind === 'bake'
        ? `Jackets closed from ${fromM} to ${toM} m, bare flanges at the bellows caged. Probe before any touch; free again below 40 °C.`
        : `Blanket tied and tagged, sign at ${Math.round((fromM + toM) / 2)} m. Probe before any touch.`,
    ),
    shock: yes(
      wired
        ? `Covers on the bars of ${tags} screwed down. Rings, watches and metal tapes stay at the portal. Wendel Quarrie alone opens covers.`
        : `Residual-current breaker of ${supply} tried before switching on. Plug is pulled before the blanket is moved.`,
    ),
    arc: wired
      ? yes(
          'All bar joints torqued and measured; looked at with the thermal camera at a tenth, half and full current.',
        )
      : no('No current through the tube or its bars: the blanket has its own plug.'),
    expansion:
      kind === 'bake'
        ? yes(
            'Shipping brackets off, guides greased, scales read cold, at 80 °C and at temperature. No ladder against the tube.',
          )
        : no('The tube grows by less than a millimetre over the warmed stretch.'),
    'stored-energy': yes('Segment stays under vacuum: no grinding, no knocks, window covers on.'),
    'vent-pressure': no('Nothing is vented under this permit; the vent valve is locked shut.'),
    oxygen: yes(
      'Nitrogen hoses off and hung up. Personal monitor on everybody inside the barriers, fan of the bay proven.',
    ),
    'tube-entry': no('Nobody enters the tube; it stays closed.'),
    fire: yes('No cardboard or tape within 1 m, extinguisher at each barrier, detector of the bay in order.'),
    elastomer: elastomer
      ? yes(
          'Bonnet with elastomer seal at a valve box: thermocouple on the bonnet, alarm at 110 °C, 120 °C at most.',
        )
      : no('Only metal seals in this stretch, says the register.'),
    'insulation-dust':
      kind === 'bake'
        ? yes('Mask and gloves while jackets are handled, off-cuts bagged.')
        : no('No insulation is cut or moved.'),
    'gas-cylinders': no('No cylinder stands in the bay.'),
    lifting:
      kind === 'bake'
        ? yes('Cart and bars brought in before heating; the crane over the stretch is locked off.')
        : no('Nothing is lifted.'),
    'lone-work': yes(
      unattended
        ? 'Two people for the ramp and for every switching. Rounds by one with a radio, call at start and end.'
        : 'Two people throughout.',
    ),
    'magnetic-field': wired
      ? yes('Return bar runs beside the feed. Notice for people with implants at both barriers.')
      : no('Blanket leads carry alternating current side by side.'),
    'radio-noise': wired
      ? yes('Gauges of the neighbours may jump at switching; read twice.')
      : no('Nothing that switches.'),
    'heat-stress':
      kind === 'bake'
        ? yes('Bay up to 30 °C: water at the barrier, not more than an hour at a time.')
        : no(`At ${celsius} °C on a small part the bay stays at 18 °C.`),
    'x-ray': no('No glass at the segment and no conditioning at high voltage.'),
  }
}

function scope(
  permit: DemoPermit,
  { kind, celsius, supply, part, bake }: Job,
  tags: string,
): Pick<PermitContent, 'work' | 'notIncluded' | 'rampKH' | 'soakHours'> {
  const window = permit.window as { fromAt: Date; untilAt: Date }
  const long = Math.round(hours(window.fromAt, window.untilAt))
  if (kind === 'bake') {
    return {
      work: `Heat ${tags} to ${celsius} °C with ${supply}${bake === null ? '' : ` while ${bake.cart} pumps`}, hold for a week, let cool to 40 °C. Rounds, readings and tightening of outer insulation meanwhile.`,
      notIncluded: 'Opening of flanges, venting, work on live bars, welding or grinding.',
      rampKH: 10,
      soakHours: 168,
    }
  }
  if (kind === 'trial') {
    return {
      work: `Run ${supply} into the bars of ${tags} for the day, look at every joint with the thermal camera.`,
      notIncluded: 'Any bake: the tube stays below the temperature given.',
      rampKH: 10,
      soakHours: Math.max(1, long - 3),
    }
  }
  return {
    work: `${permit.work}. ${part === '' ? 'Blankets along the stretch' : `Blanket on ${part}`} fed by ${supply}.`,
    notIncluded: 'Heating of the tube itself, opening of flanges, venting.',
    rampKH: 20,
    soakHours: Math.max(1, long - 8),
  }
}

/** The permit's content; `plan` is the bake plan it was drawn up from. Without a window it is a draft left half-way. */
export function contentOf(permit: DemoPermit, plan: { id: number; version: number } | null): PermitContent {
  const job = jobOf(permit)
  if (job === null || permit.window === null) return halfWay(permit)
  const tags = job.segments.map(({ tag }) => tag).join(' and ')
  const { mate, deputy, holder, electrician, attendant } = peopleOf(permit)
  const until = permit.extendedFrom ?? permit.window.untilAt
  const unattended = hours(permit.window.fromAt, until) > DAY_SHIFT_HOURS
  const wired = job.kind !== 'blanket'
  return {
    ...emptyPermitContent(),
    title: `${permit.work}, ${tags}`,
    related: wired ? [{ kind: 'electrical', number: `EL-${permit.number.slice(4)}` }] : [],
    planId: plan?.id ?? null,
    planVersion: plan?.version ?? null,
    segments: [...permit.segments],
    fromM: job.fromM,
    toM: job.toM,
    bays: bays(job.segments),
    exclusionWestM: EXCLUSION_M,
    exclusionEastM: EXCLUSION_M,
    equipment: [
      job.supply,
      ...(job.part === '' ? [] : [job.part]),
      ...(job.bake === null ? [] : [job.bake.cart]),
    ],
    ...scope(permit, job, tags),
    maxCelsius: job.celsius,
    // A blanket hangs on its own breaker, on none of the sets.
    supply: wired ? job.supply : null,
    maxAmps: job.amps,
    maxVolts: job.volts,
    openCircuitVolts: job.openCircuitVolts,
    earthing: wired
      ? `One point, at the middle anchor (${Math.round((job.fromM + job.toM) / 2)} m)`
      : 'Protective conductor of the plug',
    unattended,
    nightCover: unattended
      ? 'Pair on call by roster, 30 minutes to site'
      : 'None: heating is off before the crew leaves',
    annex: unattended
      ? {
          alarms: `Temperature above ${job.celsius + 5} °C, pressure above 1×10⁻² Pa, spread above 20 °C, earth fault, loss of the fan`,
          onCallMinutes: 30,
          shutOff: `Over-temperature cut-out at ${job.celsius + 5} °C and earth-fault monitor open the breaker of ${job.supply}; it stays open until reset by hand`,
        }
      : { alarms: '', onCallMinutes: null, shutOff: '' },
    holderId: PERSON_ID[holder],
    deputyIds: [PERSON_ID[deputy]],
    crewIds: [...new Set([mate, deputy])].map((key) => PERSON_ID[key]),
    isolatingPersonId: PERSON_ID[mate],
    electricianId: PERSON_ID[electrician],
    attendantId: PERSON_ID[attendant],
    from: permit.window.fromAt.toISOString(),
    to: until.toISOString(),
    shifts: unattended
      ? 'Day crew on workdays, pair on call otherwise; revalidated morning and evening'
      : 'Day crew, one shift',
    hazards: Object.fromEntries(HAZARD_KEYS.map((key) => [key, answers(job, unattended)[key]])),
    points: plannedPoints(permit, job),
    tests: requiredTests(job),
    protectiveEquipment: `Heat-proof gloves to ${job.celsius < 100 ? 100 : 250} °C, long sleeves, goggles${wired ? ', insulating gloves for the electrician' : ''}`,
    barriers: `Barrier with door and lamp at ${westOf(job)} m and ${eastOf(job)} m`,
    signs: wired
      ? 'Hot surface, direct current, no entry, notice for implants, suffocation'
      : 'Hot surface, no entry',
    lighting: 'Tunnel lamps on, hand lamp at each barrier',
    rescue:
      'Way out to the nearer portal, stretcher at VB-08. Emergency stop at each barrier before anybody is touched',
    assemblyPoint: ASSEMBLY,
    contacts: CONTACTS,
  }
}

const westOf = ({ fromM, segments }: Job) =>
  Math.max(segments[0]?.tag === 'SP-1' ? 0 : 0, fromM - EXCLUSION_M)
const eastOf = ({ toM, segments }: Job) =>
  Math.min(segments[0]?.tag === 'SP-1' ? 90 : 2400, toM + EXCLUSION_M)

function bays(segments: readonly DemoSegment[]): string {
  if (segments[0]?.tag === 'SP-1') return 'Side cellar'
  return segments.map(({ id }) => `Bay ${id}`).join(' and ')
}

/** Begun and left: no window, no people but the holder, no points. */
function halfWay({ segments, holder }: DemoPermit): PermitContent {
  return {
    ...emptyPermitContent(),
    title: 'Bake of SG-16 alone',
    segments: [...segments],
    work: 'Heat SG-16 to 150 °C. Whether SG-15 comes along is still open.',
    maxCelsius: 150,
    holderId: PERSON_ID[holder],
    hazards: { 'hot-surface': { applies: true, text: 'Jackets are at VB-15, two are torn.' } },
    assemblyPoint: ASSEMBLY,
    contacts: CONTACTS.slice(0, 1),
  }
}

/** What was still open in the first version of the pair's permit, before it was sent back. */
export function beforeReturn(content: PermitContent): PermitContent {
  return { ...content, planId: null, planVersion: null, earthing: 'To be settled', soakHours: 144 }
}
