/** A night of the west logger as somebody's spreadsheet saved it: rounded, and with day and month the other way round. */
import type { LoggerFile } from './files.ts'
import { nightFile } from './night-file.ts'

const NIGHT = '2026-11-06'

/** "6,23E-10" to "6,2E-10": two digits are left. */
function rounded(cell: string): string {
  const match = /^(\d),?(\d*)E(-?\d+)$/.exec(cell)
  if (match === null) return cell
  const [digits, power] = Number(`${match[1]}.${match[2] === '' ? '0' : match[2]}e${match[3]}`)
    .toExponential(1)
    .split('e') as [string, string]
  return `${digits.replace('.', ',')}E${power}`
}

/** "06.11.2026 14:00:00" to "11/06/2026 14:00": the seconds are gone as well. */
function spreadsheetTime(cell: string): string {
  return cell.replace(/^(\d\d)\.(\d\d)\.(\d{4}) (\d\d:\d\d):\d\d$/, '$2/$1/$3 $4')
}

/** The copy, with the readings that the original holds: none of them may be taken from here. */
export function handExport(): LoggerFile {
  const original = nightFile('NL-W', NIGHT)
  const [, , header, ...rows] = original.bytes.toString('latin1').trimEnd().split('\r\n')
  const lines = rows.map((row) => {
    const [time = '', ...cells] = row.split(';')
    return [spreadsheetTime(time), ...cells.map(rounded)].join(';')
  })
  const text = [header, ...lines].map((line) => `${line}\r\n`).join('')
  return {
    ...original,
    fileName: `NL-W_${NIGHT}_copy.csv`,
    bytes: Buffer.from(`\uFEFF${text}`, 'utf8'),
    lineCount: lines.length + 1,
    readings: [],
  }
}
