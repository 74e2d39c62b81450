/** The permit itself, as it hangs at the barrier. */
import { type HazardView, STANDING_SENTENCE } from '../hazards.ts'
import { instantText } from '../instant-text.ts'
import type { PaperFacts } from '../permit-sheets.ts'
import type { Block, Sheet } from './blocks.ts'
import { metres } from './sketch.ts'

const NOT_SAID = 'not said yet'

export function permitSheet(facts: PaperFacts): Sheet {
  const { content, terms } = facts
  return {
    key: 'permit',
    title: 'Permit',
    blocks: [
      { kind: 'heading', text: content.title === '' ? 'Untitled' : content.title },
      { kind: 'facts', rows: placeAndTime(facts) },
      { kind: 'heading', text: 'Work and limits' },
      { kind: 'facts', rows: workRows(facts) },
      ...(terms === '' ? [] : [{ kind: 'notice' as const, title: 'Terms added on approval', text: terms }]),
      { kind: 'heading', text: 'People' },
      { kind: 'facts', rows: peopleRows(facts) },
      { kind: 'heading', text: 'Hazards and precautions' },
      ...hazardBlocks(facts.hazards),
      { kind: 'text', text: STANDING_SENTENCE, strong: true },
      ...conflictBlocks(facts),
      { kind: 'heading', text: 'Protection at the place' },
      {
        kind: 'facts',
        rows: [
          ['To be worn', said(content.protectiveEquipment)],
          ['Barriers', said(content.barriers)],
          ['Signs', said(content.signs)],
          ['Light', said(content.lighting)],
          ['Rescue', said(content.rescue)],
          ['Assembly point', said(content.assemblyPoint)],
        ],
      },
      ...contactBlocks(facts),
      ...signatureBlocks(facts),
    ],
  }
}

function said(text: string): string {
  return text.trim() === '' ? NOT_SAID : text
}

function measured(value: number | null, unit: string): string {
  return value === null ? NOT_SAID : `${value} ${unit}`
}

function exclusionText(westM: number | null, eastM: number | null): string {
  if (westM === null && eastM === null) return NOT_SAID
  return `${measured(westM, 'm')} to the west, ${measured(eastM, 'm')} to the east`
}

/** The window with both offsets where a clock change lies in it, since each instant carries its own. */
export function windowText({ windowFrom, windowTo, site }: PaperFacts): string {
  if (windowFrom === null || windowTo === null) return NOT_SAID
  const hours = Number(((windowTo.getTime() - windowFrom.getTime()) / 3_600_000).toFixed(1))
  return `${instantText(windowFrom, site.zone)} to ${instantText(windowTo, site.zone)}, ${hours} hours`
}

function placeAndTime(facts: PaperFacts): [string, string][] {
  const { content, site, currentUntil, state, number } = facts
  const { fromM, toM, exclusionWestM, exclusionEastM } = content
  const stretch = fromM === null || toM === null ? '' : `, ${metres(fromM)} m to ${metres(toM)} m`
  const live = state === 'issued' || state === 'suspended'
  return [
    ['Number', number],
    ['Segment', `${content.segments.length === 0 ? NOT_SAID : content.segments.join(' and ')}${stretch}`],
    ['Bays', said(content.bays)],
    ['Exclusion', exclusionText(exclusionWestM, exclusionEastM)],
    ['Window', windowText(facts)],
    ...(live && currentUntil !== null
      ? [
          [
            'Valid until',
            `${instantText(currentUntil, site.zone)}, then revalidated at the segment or over`,
          ] as [string, string],
        ]
      : []),
    ['Shifts', said(content.shifts)],
    ...(content.equipment.length === 0
      ? []
      : [['Equipment', content.equipment.join(', ')] as [string, string]]),
    ...(content.related.length === 0
      ? []
      : [
          [
            'Related papers',
            content.related
              .map(({ kind, number: paper }) => `${kind.replaceAll('-', ' ')} ${paper}`)
              .join(', '),
          ] as [string, string],
        ]),
  ]
}

function workRows({ content }: PaperFacts): [string, string][] {
  const { supply, unattended, annex } = content
  const electric = supply !== null || content.maxVolts !== null
  return [
    ['Work', said(content.work)],
    ['Not included', said(content.notIncluded)],
    ['Highest temperature', measured(content.maxCelsius, '°C')],
    ['Ramp', measured(content.rampKH, '°C/h')],
    ['Soak', measured(content.soakHours, 'h')],
    ...(electric
      ? ([
          [
            'Supply',
            `${supply ?? 'none of the sets'}: at most ${measured(content.maxAmps, 'A')} and ${measured(content.maxVolts, 'V')} under load; open circuit ${measured(content.openCircuitVolts, 'V')}`,
          ],
          ['Earthing', said(content.earthing)],
        ] as [string, string][])
      : []),
    [
      'Unattended',
      unattended === null ? NOT_SAID : unattended ? 'Yes, under the annex' : 'No: somebody is at the segment',
    ],
    ['Nights', said(content.nightCover)],
    ...(unattended === true
      ? ([
          ['Annex: alarms', said(annex.alarms)],
          [
            'Annex: on call',
            annex.onCallMinutes === null ? NOT_SAID : `at the segment within ${annex.onCallMinutes} minutes`,
          ],
          ['Annex: shut-off', said(annex.shutOff)],
        ] as [string, string][])
      : []),
  ]
}

function peopleRows({ people, site }: PaperFacts): [string, string][] {
  const signed = (name: string | null, at: Date | null) =>
    name === null ? 'nobody yet' : at === null ? name : `${name}, ${instantText(at, site.zone)}`
  return [
    ['Asked for by', people.requestedBy ?? 'nobody yet'],
    ['Approved by', signed(people.approvedBy, people.approvedAt)],
    ['Permit holder', people.holder ?? NOT_SAID],
    ['Deputies', people.deputies.length === 0 ? 'none named' : people.deputies.join(', ')],
    ['Crew', people.crew.length === 0 ? 'none named' : people.crew.join(', ')],
    ['Isolating person', people.isolating ?? NOT_SAID],
    ['Electrician', people.electrician ?? NOT_SAID],
    ['Attendant', people.attendant ?? 'none named'],
    ['Accepted on site', signed(people.acceptedBy, people.acceptedAt)],
  ]
}

function hazardBlocks(hazards: readonly HazardView[]): Block[] {
  const shown = hazards.filter(({ applies }) => applies !== false)
  const left = hazards.filter(({ applies }) => applies === false)
  return [
    {
      kind: 'table',
      name: 'Hazards that apply',
      columns: [
        { title: 'Hazard', weight: 13 },
        { title: 'Figures and usual precautions', weight: 52 },
        { title: 'At this segment', weight: 35 },
      ],
      rows: shown.map((hazard) => [
        hazard.label,
        hazardCell(hazard),
        hazard.text === '' ? NOT_SAID : hazard.text,
      ]),
    },
    ...(left.length === 0
      ? []
      : [
          {
            kind: 'table' as const,
            name: 'Said not to apply',
            columns: [
              { title: 'Said not to apply', weight: 25 },
              { title: 'Why not', weight: 75 },
            ],
            rows: left.map(({ label, text }) => [label, said(text)]),
          },
        ]),
  ]
}

function hazardCell({ facts, findings, thresholds, precautions }: HazardView): string {
  const figures = facts.map(({ name, value }) => `${name}: ${value}`).join('; ')
  const limits = thresholds.map(({ label, text }) => `${label}: ${text}`).join('; ')
  return [
    figures === '' ? '' : `${figures}.`,
    limits === '' ? '' : `Limits of the site: ${limits}.`,
    ...findings.map((finding) => `Beyond a limit: ${finding}`),
    precautions.join(' '),
  ]
    .filter((line) => line !== '')
    .join('\n')
}

function conflictBlocks({ conflicts }: PaperFacts): Block[] {
  if (conflicts.length === 0) return []
  return [
    {
      kind: 'table',
      name: 'What else goes on',
      columns: [
        { title: 'Rule', weight: 6 },
        { title: 'What else goes on', weight: 54 },
        { title: 'Ruling', weight: 40 },
      ],
      rows: conflicts.map(({ rule, text, effect, ruling }) => [
        rule,
        text,
        ruling === null
          ? effect === 'warning'
            ? 'To be known; no ruling needed'
            : 'None yet'
          : `${ruling.allowed ? 'May go on' : 'May not go on'}${ruling.stale ? ', on other facts than these' : ''}: ${ruling.text} (${ruling.by})`,
      ]),
    },
  ]
}

function contactBlocks({ content }: PaperFacts): Block[] {
  if (content.contacts.length === 0) return []
  return [
    {
      kind: 'table',
      name: 'Telephone numbers',
      columns: [
        { title: 'Telephone', weight: 20 },
        { title: 'Who answers', weight: 45 },
        { title: 'Name', weight: 35 },
      ],
      rows: content.contacts.map(({ role, name, phone }) => [phone, role, name]),
    },
  ]
}

/** Lines for signatures by hand. What was signed in Ebbline stands beside them and is not replaced by them. */
function signatureBlocks({ people, site }: PaperFacts): Block[] {
  const inEbbline = (name: string | null, at: Date | null) =>
    name === null || at === null ? 'not signed' : `${name}, ${instantText(at, site.zone)}`
  return [
    { kind: 'heading', text: 'Signatures by hand' },
    {
      kind: 'table',
      name: 'Signatures by hand',
      columns: [
        { title: 'Role', weight: 20 },
        { title: 'Signed in Ebbline', weight: 32 },
        { title: 'Date and time', weight: 18 },
        { title: 'Name and signature', weight: 30 },
      ],
      rowHeight: 24,
      whole: true,
      rows: [
        ['Approving officer', inEbbline(people.approvedBy, people.approvedAt), '', ''],
        ['Permit holder', inEbbline(people.acceptedBy, people.acceptedAt), '', ''],
        ['Isolating person', 'at each point, see the isolation list', '', ''],
        ['Electrician', 'at each point, through a witness', '', ''],
        ['Attendant', 'not asked for', '', ''],
      ],
    },
  ]
}
