/**
 * What a reading is: a quantity in one fixed unit, a quality code, and marks.
 * Codes are stored as small integers; the words here are the ones shown to people and used in the API.
 */

/** What a channel measures. The stored value is always in the unit named here. */
export const QUANTITIES = {
  pressure: { unit: 'Pa', label: 'Pressure', logarithmic: true },
  temperature: { unit: '°C', label: 'Temperature', logarithmic: false },
  voltage: { unit: 'V', label: 'Voltage', logarithmic: false },
  current: { unit: 'A', label: 'Current', logarithmic: false },
  energy: { unit: 'kWh', label: 'Energy', logarithmic: false },
  'ion-current': { unit: 'A', label: 'Ion current', logarithmic: true },
  oxygen: { unit: '%', label: 'Oxygen', logarithmic: false },
  stroke: { unit: 'mm', label: 'Joint stroke', logarithmic: false },
  resistance: { unit: 'Ω', label: 'Resistance', logarithmic: false },
  switch: { unit: '', label: 'On or off', logarithmic: false },
} as const

export type Quantity = keyof typeof QUANTITIES

export const QUANTITY_NAMES = Object.keys(QUANTITIES) as [Quantity, ...Quantity[]]

/**
 * Quality codes in storage order. The position in this list is the stored number, so the list only ever grows
 * at its end.
 */
export const QUALITIES = [
  'good',
  'over-range',
  'under-range',
  'off',
  'starting',
  'degas',
  'fault',
  'no-signal',
  'suspect',
  'manual',
  'withdrawn',
] as const

export type Quality = (typeof QUALITIES)[number]

/** What a quality means, as people read it beside a missing value. */
export const QUALITY_LABELS: Record<Quality, string> = {
  good: 'good',
  'over-range': 'over range',
  'under-range': 'under range',
  off: 'off',
  starting: 'starting up',
  degas: 'degassing',
  fault: 'gauge fault',
  'no-signal': 'no signal',
  suspect: 'suspect',
  manual: 'typed by hand',
  withdrawn: 'withdrawn',
}

/** Number stored for a quality word. */
export function qualityCode(quality: Quality): number {
  return QUALITIES.indexOf(quality)
}

/** Word for a stored quality number; an unknown number is a programming error. */
export function qualityWord(code: number): Quality {
  const word = QUALITIES[code]
  if (word === undefined)
    throw new RangeError(`No quality has the code ${code} (0 to ${QUALITIES.length - 1})`)
  return word
}

/** Qualities whose value may be used as a measured value in limits, fits and averages. */
export const USABLE_QUALITIES: readonly Quality[] = ['good', 'manual']

/** Marks that a reading may carry beside its quality, as bits of one number. */
export const MARKS = {
  'time-ambiguous': 1,
  'time-reconstructed': 2,
  'time-coarse': 4,
  conflict: 8,
  'order-kept': 16,
} as const

export type Mark = keyof typeof MARKS

/** Marks that make the instant untrustworthy: such readings stay out of rates, limits and fits. */
export const UNTIMED_MARKS = MARKS['time-ambiguous'] | MARKS['time-reconstructed']

/** Marks set in a stored number. */
export function bitsToMarks(bits: number): Mark[] {
  return (Object.keys(MARKS) as Mark[]).filter((mark) => (bits & MARKS[mark]) !== 0)
}

/** Whether a stored reading may be drawn as a measured value, averaged, limited or fitted. */
export function isUsable(quality: Quality, marks: number): boolean {
  return USABLE_QUALITIES.includes(quality) && (marks & UNTIMED_MARKS) === 0
}

/** Ceilings of plausibility: outside these a value is kept but never stored as good. */
export const PLAUSIBLE: Record<'pressure' | 'temperature', { min: number; max: number }> = {
  pressure: { min: 1e-12, max: 2e5 },
  temperature: { min: -50, max: 600 },
}
