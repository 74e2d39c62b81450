import { tzOffset } from '@date-fns/tz'
import { offsetText } from './schemas/instant.ts'

/**
 * An instant inside a sentence, in site time and as people type it: `2026-11-09 08:00 (UTC+01:00)`. With its offset,
 * because a sentence may be read long after and elsewhere, and one hour of autumn comes twice.
 */
export function instantText(at: Date, zone: string): string {
  const minutes = tzOffset(zone, at)
  const wall = new Date(at.getTime() + minutes * 60_000)
  return `${wall.toISOString().slice(0, 16).replace('T', ' ')} (UTC${offsetText(minutes)})`
}
