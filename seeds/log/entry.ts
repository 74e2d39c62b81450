/** An entry of the demo's log, and how figures are written in one. */
import type { EntryKind } from '../../app/domain/logbook.ts'
import type { PersonKey } from '../people.ts'

export interface DemoEntry {
  segment: string | null
  kind: EntryKind
  eventAt: Date
  writtenAt: Date
  by: PersonKey
  text: string
  amended?: { writtenAt: Date; text: string; reason: string }
}

const UP = '⁰¹²³⁴⁵⁶⁷⁸⁹'

/** "5.1×10⁻⁸ Pa". */
export function pa(value: number): string {
  const [digits, power] = value.toExponential(1).split('e') as [string, string]
  const raised = [...power.replace('+', '')].map((one) => (one === '-' ? '⁻' : UP[Number(one)])).join('')
  return `${digits}×10${raised} Pa`
}

/** An entry written some minutes after what it tells of. */
export function entry(
  eventAt: Date,
  minutesLater: number,
  rest: Omit<DemoEntry, 'eventAt' | 'writtenAt'>,
): DemoEntry {
  return { eventAt, writtenAt: new Date(eventAt.getTime() + minutesLater * 60_000), ...rest }
}

/** So many hours after an instant. */
export function hoursAfter(at: Date, hours: number): Date {
  return new Date(at.getTime() + hours * 3_600_000)
}
