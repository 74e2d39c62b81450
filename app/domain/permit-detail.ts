/** What an act on a permit had to say besides its reason, as lines for its story. */
import type { PermitWording } from './permit-differences.ts'

/** How one field is told; an empty text leaves it out. */
type Teller = (value: unknown, wording: PermitWording) => string

const said =
  (label: string): Teller =>
  (value) =>
    typeof value === 'string' && value !== '' ? `${label}: ${value}` : ''

const yesNo =
  (yes: string, no: string): Teller =>
  (value) =>
    value === true ? yes : value === false ? no : ''

const at =
  (label: string): Teller =>
  (value, { time }) =>
    isInstant(value) ? `${label}: ${time(value)}` : ''

const person =
  (label: string): Teller =>
  (value, wording) =>
    typeof value === 'number' ? `${label}: ${wording.person(value)}` : ''

const figure =
  (label: string, unit: string): Teller =>
  (value) =>
    typeof value === 'number' ? `${label}: ${Number(value.toFixed(1))} ${unit}` : ''

const choice =
  (words: Readonly<Record<string, string>>): Teller =>
  (value) =>
    typeof value === 'string' ? (words[value] ?? '') : ''

/** In the order in which they are told. See domain/permit-act-details.ts and the outcomes in domain/permits.ts. */
const TELLERS: Readonly<Record<string, Teller>> = {
  terms: said('Terms added by the officer'),
  barriersPlaced: yesNo('Barriers stand', 'Barriers do not stand'),
  signsPosted: yesNo('Signs are up', 'Signs are not up'),
  onSite: yesNo('Signed at the segment', ''),
  outgoingId: person('Handed over by'),
  incomingId: person('Taken over by'),
  outcome: choice({ complete: 'The work is complete', stopped: 'The work was stopped' }),
  plantState: said('Plant left'),
  peopleClear: yesNo('Everybody is clear', ''),
  toolsOut: yesNo('Tools and materials are out', ''),
  hottestC: figure('Hottest surface', '°C'),
  locks: choice({ removed: 'All locks are off', left: 'Locks are left on' }),
  locksText: said('About the locks'),
  hours: figure('Longer by', 'h'),
  recheck: said('Checked again'),
  who: said('Made safe by'),
  at: at('Made safe at'),
  how: (value, wording) =>
    value === 'at-site'
      ? 'Both at the segment'
      : value === 'by-phone'
        ? 'By telephone'
        : said('Made safe how')(value, wording),
  readBack: yesNo('The state of the work was read back', ''),
  inspection: said('Found at the segment'),
  lessons: said('To learn from it'),
  until: at('Valid until'),
  windowTo: at('Window until'),
  suspendedHours: figure('Work was stopped for', 'h'),
  because: choice({
    window: 'Its window ended',
    revalidation: 'It was not revalidated in time',
    'take-up': 'Nobody accepted it within two hours of the beginning of its window',
  }),
  text: said('Remark'),
}

/** Lines in words; what is not known here is left out of the story and stays in the database. */
export function detailWords(detail: unknown, wording: PermitWording): string[] {
  if (typeof detail !== 'object' || detail === null) return []
  const fields = detail as Readonly<Record<string, unknown>>
  return Object.entries(TELLERS)
    .map(([key, tell]) => (fields[key] === undefined ? '' : tell(fields[key], wording)))
    .filter((line) => line !== '')
}

function isInstant(value: unknown): value is string {
  return typeof value === 'string' && !Number.isNaN(Date.parse(value))
}
