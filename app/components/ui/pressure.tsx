import { useSite } from '#app/hooks/use-site.ts'
import { pressureParts, pressurePlain, pressureWords } from './format-pressure.ts'

/**
 * A pressure in the reader's unit. Speech gets words and copying gets `5.1e-8`. An absent value is a dash with its
 * reason, never an empty place and never a zero: missing, off, rejected and zero are four different things.
 *
 * @param pa pressure in Pa, or null for none
 * @param digits significant digits
 * @param reason why there is no value, such as "filament off"; shown beside the dash
 * @param bare leaves the unit out where a column head names it
 */
export function Pressure({
  pa,
  digits = 2,
  reason = 'no reading',
  bare = false,
}: {
  pa: number | null
  digits?: number
  reason?: string
  bare?: boolean
}) {
  const { unit } = useSite()
  if (pa === null) {
    return (
      <span className="text-ink-3">
        <span aria-hidden="true">– </span>
        {reason}
      </span>
    )
  }
  if (pa === 0) return <span className="whitespace-nowrap">{bare ? '0' : `0\u00a0${unit}`}</span>
  const { mantissa, exponent } = pressureParts(pa, unit, digits)
  return (
    <span className="whitespace-nowrap" data-copy={pressurePlain(pa, unit, digits)}>
      <span aria-hidden="true">
        {mantissa}&nbsp;×&nbsp;10<sup>{String(exponent).replace('-', '−')}</sup>
        {!bare && <>&nbsp;{unit}</>}
      </span>
      <span className="sr-only select-none">{pressureWords(pa, unit, digits)}</span>
    </span>
  )
}
