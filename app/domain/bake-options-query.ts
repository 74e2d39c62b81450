/** The question about bakes as it stands in an address. What cannot be read is named and keeps what was typed. */
import { readAskedPressure } from './schemas/asked-pressure.ts'

export interface OptionsQuery {
  /** Tags, as typed but in capitals; none when nothing was asked yet. */
  segments: string[]
  /** Null for the target in service. */
  targetPa: number | null
  leakPaM3S: number
  /** Null for the site's ramp rate. */
  upKH: number | null
  typed: { target: string; leak: string; ramp: string }
  errors: { target?: string[]; leak?: string[]; ramp?: string[] }
}

const MOST_LEAK = 1
const RAMP = { least: 0.5, most: 60 }

/** Reads `segments` (repeated or with commas), `target` in Pa, `leak` in Pa·m³/s and `ramp` in °C/h. */
export function readOptionsQuery(params: URLSearchParams): OptionsQuery {
  const segments = params
    .getAll('segments')
    .flatMap((text) => text.split(','))
    .map((tag) => tag.trim().toUpperCase())
    .filter((tag) => tag !== '')
  const target = readAskedPressure(params.get('target'))
  const leak = numberOf(params.get('leak'))
  const ramp = numberOf(params.get('ramp'))
  const errors: OptionsQuery['errors'] = {}
  if (target.error !== null) errors.target = [target.error]
  const leakGood = leak.value === null || (leak.value >= 0 && leak.value <= MOST_LEAK)
  if (!leakGood) {
    errors.leak = [
      `Found “${leak.text}”; expected a leak from 0 to ${MOST_LEAK} Pa·m³/s, such as 1e-8. Leave it empty for none.`,
    ]
  }
  const rampGood = ramp.value === null || (ramp.value >= RAMP.least && ramp.value <= RAMP.most)
  if (!rampGood) {
    errors.ramp = [
      `Found “${ramp.text}”; expected ${RAMP.least} to ${RAMP.most} °C/h, such as 10. Leave it empty for the site's own.`,
    ]
  }
  return {
    segments,
    targetPa: target.pa,
    leakPaM3S: leakGood ? (leak.value ?? 0) : 0,
    upKH: rampGood ? ramp.value : null,
    typed: { target: target.text, leak: leak.text, ramp: ramp.text },
    errors,
  }
}

// NaN for text that is no number: it lies within no range.
function numberOf(text: string | null): { value: number | null; text: string } {
  const trimmed = (text ?? '').trim().slice(0, 40)
  return { value: trimmed === '' ? null : Number(trimmed.replace(',', '.')), text: trimmed }
}
