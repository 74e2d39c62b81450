import { z } from 'zod'

/** A pressure asked for in the address, in Pa: decimal point or comma, `1e-5` or `0.00001`. */
const AskedPressureSchema = z
  .string()
  .trim()
  .transform((text) => Number(text.replace(',', '.')))
  .pipe(z.number().min(1e-12).max(1e5))

export interface AskedPressure {
  /** Null when nothing was asked, or what was asked is not a pressure. */
  pa: number | null
  /** What was typed, to show it again. */
  text: string
  error: string | null
}

/** Reads the pressure a forecast is asked for; a bad one is named and changes nothing else. */
export function readAskedPressure(text: string | null): AskedPressure {
  if (text === null || text.trim() === '') return { pa: null, text: '', error: null }
  const parsed = AskedPressureSchema.safeParse(text)
  if (parsed.success) return { pa: parsed.data, text, error: null }
  return {
    pa: null,
    text,
    error: `“${text.slice(0, 40)}” is not a pressure between 10⁻¹² and 10⁵ Pa. Write it like 1e-5 or 0.00001.`,
  }
}
