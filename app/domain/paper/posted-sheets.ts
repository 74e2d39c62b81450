/** Sheets that hang beside the permit: isolation list, sketch, heating curve, emergency card, sign-in. */
import { instantText } from '../instant-text.ts'
import type { PaperFacts, PaperPoint, PaperTest } from '../permit-sheets.ts'
import { PERMIT_TEST_LABELS } from '../permit-words.ts'
import type { Sheet } from './blocks.ts'
import { curveDrawing, curvePoints } from './curve.ts'
import { closedStretch, metres, sketchDrawing } from './sketch.ts'

export function isolationSheet({ points, tests, site, heatingText }: PaperFacts): Sheet {
  return {
    key: 'isolation',
    title: 'Isolation list and tests',
    blocks: [
      { kind: 'heading', text: 'Isolation points with their locks' },
      {
        kind: 'table',
        name: 'Isolation points',
        columns: [
          { title: 'Point', weight: 9 },
          { title: 'What is isolated', weight: 18 },
          { title: 'Required position', weight: 16 },
          { title: 'Lock', weight: 9 },
          { title: 'Applied', weight: 21 },
          { title: 'Verified', weight: 21 },
          { title: 'Seen', weight: 6 },
        ],
        rows: points.map((point) => pointRow(point, site.zone)),
      },
      {
        kind: 'text',
        text: 'Nobody takes off a lock but the person who put it on. A lock that hangs otherwise than this list says stops the work.',
        strong: true,
      },
      { kind: 'text', text: `Heating: ${heatingText}` },
      { kind: 'heading', text: 'Tests' },
      {
        kind: 'table',
        name: 'Tests',
        columns: [
          { title: 'Test and place', weight: 26 },
          { title: 'Wanted', weight: 12 },
          { title: 'Last result', weight: 10 },
          { title: 'Instrument', weight: 16 },
          { title: 'Tester', weight: 20 },
          { title: 'Due again', weight: 19 },
        ],
        rows: tests.map((test) => testRow(test, site.zone)),
      },
    ],
  }
}

function pointRow({ tag, isolates, required, lock, verified }: PaperPoint, zone: string): string[] {
  const step = (by: string, at: Date) => `${by}\n${instantText(at, zone)}`
  return [
    tag,
    isolates,
    required,
    lock === null ? 'none' : lock.tagNumber === '' ? lock.number : `${lock.number}\ntag ${lock.tagNumber}`,
    lock === null ? 'NOT LOCKED' : step(lock.appliedBy, lock.appliedAt),
    verified === null ? 'NOT VERIFIED' : step(verified.by, verified.at),
    '',
  ]
}

function testRow({ kind, place, wanted, last, overdue }: PaperTest, zone: string): string[] {
  const what = place === '' ? PERMIT_TEST_LABELS[kind] : `${PERMIT_TEST_LABELS[kind]}\n${place}`
  if (last === null) return [what, wanted, 'NONE YET', '', '', '']
  const calibration =
    last.calibrationDue === null
      ? ''
      : `\ncalibrated to ${instantText(last.calibrationDue, zone).slice(0, 10)}`
  return [
    what,
    wanted,
    [last.result, last.passed ? 'passed' : 'NOT PASSED'].filter((word) => word !== '').join('\n'),
    last.instrument === '' ? 'none used' : `${last.instrument}${calibration}`,
    `${last.by}\n${instantText(last.at, zone)}`,
    last.nextDueAt === null
      ? 'once'
      : `${overdue ? 'OVERDUE since ' : ''}${instantText(last.nextDueAt, zone)}`,
  ]
}

export function sketchSheet({ sketch, content, number }: PaperFacts): Sheet | null {
  if (sketch === null) return null
  const closed = closedStretch(sketch)
  const tags = content.segments.join(' and ')
  const gates = sketch.gates
    .filter(({ atM }) => atM >= closed.fromM && atM <= closed.toM)
    .map(({ tag, atM }) => `${tag} at ${metres(atM)} m`)
  return {
    key: 'sketch',
    title: 'Sketch of the exclusion area',
    blocks: [
      { kind: 'big', text: `NO ENTRY ${metres(closed.fromM)} m to ${metres(closed.toM)} m`, size: 28 },
      {
        kind: 'drawing',
        drawing: sketchDrawing(sketch),
        words: `Along the tunnel: the tube of ${tags} is heated from ${metres(sketch.fromM)} m to ${metres(sketch.toM)} m. Nobody enters between the barriers at ${metres(closed.fromM)} m and ${metres(closed.toM)} m but the people of ${number}.`,
      },
      {
        kind: 'facts',
        rows: [
          ['West barrier', `${metres(closed.fromM)} m`],
          ['Heated tube', `${metres(sketch.fromM)} m to ${metres(sketch.toM)} m`],
          ['East barrier', `${metres(closed.toM)} m`],
          ['Gate valves inside', gates.length === 0 ? 'none' : gates.join(', ')],
          ['Bays', content.bays === '' ? 'not said yet' : content.bays],
          [
            'Barriers and signs',
            [content.barriers, content.signs].filter((text) => text !== '').join('. ') || 'not said yet',
          ],
        ],
      },
    ],
  }
}

export function curveSheet({ curve, content }: PaperFacts): Sheet | null {
  if (curve === null) return null
  const [, top, soakEnd] = curvePoints(curve)
  const hours = (value: number | undefined) => `${Number((value ?? 0).toFixed(1))} h`
  return {
    key: 'curve',
    title: 'Heating curve',
    blocks: [
      { kind: 'notice', title: 'Step at the time of printing', text: curve.stepText },
      {
        kind: 'drawing',
        drawing: curveDrawing(curve),
        words: `From ${curve.ambientC} °C at ${curve.rampKH} °C/h to ${curve.maxCelsius} °C, reached after ${hours(top?.hours)}; held until ${hours(soakEnd?.hours)}${curve.cooling.length > 0 ? ', then cooling by itself' : ''}.`,
      },
      {
        kind: 'facts',
        rows: [
          ['Ramp', `${curve.rampKH} °C/h at most, ${hours(top?.hours)}`],
          ['Soak', `${curve.soakHours} h at ${curve.maxCelsius} °C at most`],
          [
            'Supply',
            content.supply === null
              ? 'none of the sets'
              : `${content.supply}, ${content.maxAmps ?? '?'} A and ${content.maxVolts ?? '?'} V at most`,
          ],
        ],
      },
      {
        kind: 'text',
        text: 'The curve is what the permit allows, not what was measured. How hot a part is, a contact probe says.',
        strong: true,
      },
    ],
  }
}

/** What to do first when something goes wrong. The site's own instruction comes before it. */
export function emergencySheet({ content, number }: PaperFacts): Sheet {
  const { contacts, assemblyPoint, segments, fromM, toM, supply } = content
  const place = `${segments.join(' and ')}${fromM === null || toM === null ? '' : `, ${metres(fromM)} m to ${metres(toM)} m`}`
  return {
    key: 'emergency',
    title: 'Emergency card',
    blocks: [
      {
        kind: 'notice',
        title: 'The site’s own emergency instruction comes before this card',
        text: 'So do those of the first-aiders and of the rescue service. The first aid below is common advice from memory, not verified.',
      },
      { kind: 'heading', text: '1 Stop' },
      {
        kind: 'text',
        size: 11,
        text: `Press the emergency stop at the nearest barrier${supply === null ? '' : ` (${supply})`}, if you can reach it without passing the tube. Count the tube as hot and the bars as live all the same.`,
      },
      { kind: 'heading', text: '2 Call' },
      ...contacts.map(({ role, name, phone }) => ({
        kind: 'big' as const,
        text: `${phone}  ${role}${name === '' ? '' : `, ${name}`}`,
        size: 15,
      })),
      {
        kind: 'text',
        size: 11,
        text: `Say: heated segment ${place}, permit ${number}; what has happened; how many people; who is calling.`,
      },
      { kind: 'heading', text: '3 Get out' },
      {
        kind: 'big',
        text: assemblyPoint === '' ? 'Assembly point: not said yet' : `Assembly point: ${assemblyPoint}`,
        size: 15,
      },
      {
        kind: 'text',
        size: 11,
        text: 'Warn others on the way, leave things behind, count people outside. Nobody goes back in.',
      },
      { kind: 'heading', text: 'Burns' },
      {
        kind: 'text',
        size: 11,
        text: 'Away from the heat, then running tap water at once and for about twenty minutes. Rings and watch off, nothing pulled off the skin, no ice, no ointment; a clean loose cover. More than a palm, or on face, hand, foot or joint: call.',
      },
      { kind: 'heading', text: 'Somebody hangs on a live part' },
      {
        kind: 'text',
        size: 11,
        text: 'Do not touch them. Stop the supply first, see that it is off, then help. Call even if they feel well.',
      },
      { kind: 'heading', text: 'Alarm of an oxygen monitor, or somebody lies there for no reason' },
      {
        kind: 'text',
        size: 11,
        text: 'Leave at once and keep others out. Do not go in after anybody without breathing apparatus: too little oxygen gives no warning, and it takes whoever follows as well. Call and say “oxygen”.',
        strong: true,
      },
      { kind: 'heading', text: 'Seal or hose that has been far too hot' },
      {
        kind: 'text',
        size: 11,
        text: 'Fluoro-elastomer that decomposed can leave hydrogen fluoride. Touch nothing, keep out, have the bay aired. On skin or in the eyes: rinse with plenty of water at once, clothes off, call and say “hydrogen fluoride”, even if it does not hurt yet: it needs a treatment of its own.',
      },
      { kind: 'heading', text: 'Fire' },
      {
        kind: 'text',
        size: 11,
        text: 'Stop, call, get out. An extinguisher for live electrical equipment is for a small fire with the way out behind you.',
      },
    ],
  }
}

const SIGN_IN_ROWS = 20

export function signInSheet({ number, content }: PaperFacts): Sheet {
  return {
    key: 'sign-in',
    title: 'Sign-in at the barrier',
    blocks: [
      {
        kind: 'text',
        text: `Everybody who passes a barrier of ${number} (${content.segments.join(' and ')}) signs in and out. Whoever is signed in is looked for.`,
      },
      {
        kind: 'table',
        name: 'Sign-in',
        columns: [
          { title: 'Name', weight: 24 },
          { title: 'Firm', weight: 15 },
          { title: 'Oxygen monitor', weight: 12 },
          { title: 'Own lock', weight: 10 },
          { title: 'In: date, time', weight: 15 },
          { title: 'Out: date, time', weight: 15 },
          { title: 'Sign', weight: 9 },
        ],
        rows: [],
        blank: SIGN_IN_ROWS,
        rowHeight: 26,
      },
    ],
  }
}
