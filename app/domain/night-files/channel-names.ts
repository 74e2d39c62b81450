import { channelKey } from '../register.ts'
import type { KnownChannel } from './types.ts'

export type ChannelMatch =
  | { kind: 'known'; channel: KnownChannel }
  /** Several registered names look the same once case, blanks and dashes are set aside. */
  | { kind: 'several'; names: string[] }
  | { kind: 'unknown' }

/** Finds the registered channel for a name in a file. */
export class ChannelBook {
  readonly #exact = new Map<string, KnownChannel>()
  readonly #byKey = new Map<string, KnownChannel[]>()
  /** False when nothing is registered: then every name stands for itself. */
  readonly closed: boolean

  constructor(channels: readonly KnownChannel[] | null) {
    this.closed = channels !== null
    for (const channel of channels ?? []) {
      this.#exact.set(channel.name, channel)
      const key = channelKey(channel.name)
      const same = this.#byKey.get(key)
      if (same === undefined) this.#byKey.set(key, [channel])
      else same.push(channel)
    }
  }

  match(name: string): ChannelMatch {
    const exact = this.#exact.get(name)
    if (exact !== undefined) return { kind: 'known', channel: exact }
    const same = this.#byKey.get(channelKey(name))
    if (same === undefined) return { kind: 'unknown' }
    if (same.length > 1) return { kind: 'several', names: same.map((channel) => channel.name) }
    return { kind: 'known', channel: same[0] as KnownChannel }
  }

  /** Registered spellings, in order. */
  names(): string[] {
    return Array.from(this.#exact.keys()).sort()
  }

  isKnown(name: string): boolean {
    return this.match(name).kind === 'known'
  }
}
