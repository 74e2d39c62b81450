/** Many parts, one alert: raised with the first, worse with each new one or a higher priority, cleared with the last. */
import { z } from 'zod'
import { ALERT_PRIORITIES, type AlertPriority } from '../alert-words.ts'
import type { AlertEvent, AlertSubject } from './facts.ts'
import type { Change } from './judge.ts'

const OccurrenceMemorySchema = z.object({
  /** Parts that are on. */
  open: z.array(z.string()),
  /** Parts told in this occurrence with the highest priority told for each. */
  told: z.record(z.string(), z.enum(ALERT_PRIORITIES)),
})
type OccurrenceMemory = z.infer<typeof OccurrenceMemorySchema>

function higher(a: AlertPriority, b: AlertPriority): boolean {
  return ALERT_PRIORITIES.indexOf(a) < ALERT_PRIORITIES.indexOf(b)
}

export class Occurrence {
  readonly #subject: AlertSubject
  #m: OccurrenceMemory

  constructor(subject: AlertSubject, memory: unknown) {
    this.#subject = subject
    const kept = OccurrenceMemorySchema.safeParse(memory)
    this.#m = kept.success
      ? { open: [...kept.data.open], told: { ...kept.data.told } }
      : { open: [], told: {} }
  }

  get active(): boolean {
    return this.#m.open.length > 0
  }
  memory(): OccurrenceMemory {
    return this.#m
  }

  /** Events of changes in the order of their instants. At one instant what turns on goes before what turns off. */
  take(changes: readonly Change[]): AlertEvent[] {
    const sorted = [...changes].sort((a, b) => a.atMs - b.atMs || Number(b.on) - Number(a.on))
    return sorted.flatMap((change) => {
      const kind = change.on ? this.#turnOn(change) : this.#turnOff(change)
      return kind === null ? [] : [this.#event(kind, change)]
    })
  }

  /** Ends it because it is not watched any more. */
  stop(atMs: number, because: string): AlertEvent[] {
    if (!this.active) return []
    const priority = this.#highest()
    this.#m = { open: [], told: {} }
    return [
      this.#event('clear', {
        part: '',
        on: false,
        atMs,
        sinceMs: atMs,
        priority,
        value: null,
        limit: null,
        unit: '',
        what: because,
        text: `${because} It may still be so: what it watched is not watched any more.`,
        more: { suppressed: true },
      }),
    ]
  }

  #turnOn({ part, priority }: Change): 'raise' | 'worsen' | null {
    const first = !this.active
    const told = this.#m.told[part]
    const worse = told === undefined || higher(priority, told)
    if (!this.#m.open.includes(part)) this.#m.open.push(part)
    if (worse) this.#m.told[part] = priority
    if (first) return 'raise'
    return worse ? 'worsen' : null
  }

  #turnOff({ part }: Change): 'clear' | null {
    if (!this.#m.open.includes(part)) return null
    this.#m.open = this.#m.open.filter((one) => one !== part)
    if (this.active) return null
    this.#m.told = {}
    return 'clear'
  }

  #highest(): AlertPriority {
    const found = Object.values(this.#m.told)
    return ALERT_PRIORITIES.find((priority) => found.includes(priority)) ?? 'low'
  }

  #event(kind: AlertEvent['kind'], change: Change): AlertEvent {
    const { segment, tag } = this.#subject
    const { atMs, sinceMs, priority, value, limit, unit, what, text, more, part } = change
    return {
      kind,
      at: new Date(atMs),
      since: new Date(sinceMs),
      priority,
      value: value !== null && Number.isFinite(value) ? value : null,
      limit: limit !== null && Number.isFinite(limit) ? limit : null,
      unit,
      title: `${segment ?? tag} ${what}`.slice(0, 200),
      detail: { text, ...(part === '' ? {} : { part }), ...more },
    }
  }
}
