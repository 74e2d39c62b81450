/** Text as a mail can carry it: nothing that ends a header, lines that a phone shows whole, figures in plain letters. */
import { tzOffset } from '@date-fns/tz'
import { offsetText } from '../schemas/instant.ts'

/** Line breaks and controls, the breaks that Unicode adds, and marks that turn the direction of writing round. */
const UNSAFE = /[\p{Cc}\u2028\u2029\u200e\u200f\u202a-\u202e\u2066-\u2069\ufeff]+/gu

/** One line that cannot end a header nor look like another one; cut at `longest` characters. */
export function headerSafe(text: string, longest = 300): string {
  const line = text.replace(UNSAFE, ' ').replace(/\s+/gu, ' ').trim()
  const letters = [...line]
  return letters.length <= longest ? line : `${letters.slice(0, longest - 1).join('')}…`
}

/** Whether a header of this name may be added by what composes a mail: none that the sender sets itself. */
export function isHeaderName(name: string): boolean {
  return /^[A-Za-z][A-Za-z0-9-]{0,60}$/.test(name) && !RESERVED.has(name.toLowerCase())
}

const RESERVED = new Set(
  'from sender to cc bcc subject date message-id reply-to return-path content-type content-transfer-encoding mime-version in-reply-to references auto-submitted list-id received'.split(
    ' ',
  ),
)

/**
 * Whether a text is one plain mail address that any mail server takes. Quoted names, comments, lists and addresses with
 * letters beyond ASCII are refused: nobody on a night shift has one, and each is a way to smuggle in a second address.
 */
export function isMailAddress(text: string): boolean {
  if (text.length > 254) return false
  const at = text.lastIndexOf('@')
  const [local, domain] = [text.slice(0, at), text.slice(at + 1)]
  if (!/^[A-Za-z0-9!#$%&'*+/=?^_`{|}~-]+(\.[A-Za-z0-9!#$%&'*+/=?^_`{|}~-]+)*$/.test(local)) return false
  return (
    local.length <= 64 &&
    /^([A-Za-z0-9]([A-Za-z0-9-]{0,61}[A-Za-z0-9])?)(\.[A-Za-z0-9]([A-Za-z0-9-]{0,61}[A-Za-z0-9])?)+$/.test(
      domain,
    )
  )
}

const RAISED = '⁰¹²³⁴⁵⁶⁷⁸⁹'

/** Figures in letters that every device shows: `2.1 × 10⁻⁷ Pa` as `2.1e-07 Pa`, `24 °C` as `24 C`. */
export function plainFigures(text: string): string {
  return text
    .replace(/\s*×\s*10(⁻?)([⁰¹²³⁴⁵⁶⁷⁸⁹]+)/gu, (_all, minus: string, digits: string) => {
      const power = [...digits].map((digit) => RAISED.indexOf(digit)).join('')
      return `e${minus === '' ? '+' : '-'}${power.padStart(2, '0')}`
    })
    .replace(/[⁰¹²³⁴⁵⁶⁷⁸⁹]/gu, (digit) => String(RAISED.indexOf(digit)))
    .replace(/⁻/gu, '-')
    .replace(/°\s?C/gu, 'C')
    .replace(/[\u00a0\u2009\u202f]/gu, ' ')
    .replace(/[−–]/gu, '-')
    .replace(/×/gu, 'x')
    .replace(/≥/gu, '>=')
    .replace(/≤/gu, '<=')
    .replace(/Ω/gu, 'ohm')
    .replace(/[‘’]/gu, "'")
    .replace(/[“”]/gu, '"')
    .replace(/…/gu, '...')
}

/** A value in plain letters, with its unit: pressures and ion currents by powers of ten, the rest as they are said. */
export function plainValue(value: number, unit: string): string {
  const small = value !== 0 && (Math.abs(value) < 0.01 || Math.abs(value) >= 1e5)
  const figure = small ? scientific(value) : String(Number(value.toPrecision(4)))
  return unit === '' ? figure : `${figure} ${plainFigures(unit)}`
}

function scientific(value: number): string {
  const [mantissa, power] = value.toExponential(1).split('e') as [string, string]
  return `${mantissa}e${power.slice(0, 1)}${power.slice(1).padStart(2, '0')}`
}

/** How wide a phone held upright shows a line of plain text. */
export const MAIL_COLUMNS = 40

/** Breaks text into lines of at most `columns`; words stay whole, so that an address can still be clicked. */
export function wrap(text: string, columns = MAIL_COLUMNS): string {
  const lines: string[] = []
  for (const paragraph of text.split('\n')) {
    let line = ''
    for (const word of paragraph.split(' ').filter((piece) => piece !== '')) {
      if (line === '') line = word
      else if (line.length + 1 + word.length <= columns) line += ` ${word}`
      else {
        lines.push(line)
        line = word
      }
    }
    lines.push(line)
  }
  return lines.join('\n')
}

export function escapeHtml(text: string): string {
  return text
    .replaceAll('&', '&amp;')
    .replaceAll('<', '&lt;')
    .replaceAll('>', '&gt;')
    .replaceAll('"', '&quot;')
    .replaceAll("'", '&#39;')
}

interface LocalTexts {
  /** 2026-11-09 */
  day: string
  /** 02:14 */
  time: string
  /** +01:00 */
  offset: string
}

/** An instant by the site's clock on the wall. */
export function localTexts(at: Date, zone: string): LocalTexts {
  const minutes = tzOffset(zone, at)
  const wall = new Date(at.getTime() + minutes * 60_000).toISOString()
  return { day: wall.slice(0, 10), time: wall.slice(11, 16), offset: offsetText(minutes) }
}

/** `2026-11-09 02:14 local (01:14 UTC)`; the day is said twice where the two differ. */
export function bothTimes(at: Date, zone: string): string {
  const local = localTexts(at, zone)
  const utc = at.toISOString()
  const utcDay = utc.slice(0, 10)
  return `${local.day} ${local.time} local (${utcDay === local.day ? '' : `${utcDay} `}${utc.slice(11, 16)} UTC)`
}

const DAYS = ['Sun', 'Mon', 'Tue', 'Wed', 'Thu', 'Fri', 'Sat']
const MONTHS = ['Jan', 'Feb', 'Mar', 'Apr', 'May', 'Jun', 'Jul', 'Aug', 'Sep', 'Oct', 'Nov', 'Dec']

/** A date as the Date field of RFC 5322 section 3.3 has it, in site time with its offset. */
export function mailDate(at: Date, zone: string): string {
  const wall = new Date(at.getTime() + tzOffset(zone, at) * 60_000)
  const [time, offset] = [wall.toISOString().slice(11, 19), localTexts(at, zone).offset.replace(':', '')]
  return `${DAYS[wall.getUTCDay()]}, ${wall.getUTCDate()} ${MONTHS[wall.getUTCMonth()]} ${wall.getUTCFullYear()} ${time} ${offset}`
}
