import { channelKey } from '../register.ts'
import type { SourceProfile } from '../schemas/source-profile.ts'
import { type Unit, unitOf } from './units.ts'

/** Curves of the gauges of a source that write volts instead of a pressure. */
export class Curves {
  readonly #byChannel: ReadonlyMap<string, SourceProfile['curves'][number]>

  constructor(curves: SourceProfile['curves']) {
    this.#byChannel = new Map(curves.map((curve) => [channelKey(curve.channel), curve]))
  }

  /** The unit as which a channel's volts are read; null without a curve, and for what are no volts. */
  unitFor(channel: string, written: Unit): Unit | null {
    const curve = this.#byChannel.get(channelKey(channel))
    const pressure = unitOf(curve?.unit ?? null)
    if (curve === undefined || pressure?.quantity !== 'pressure' || written.quantity !== 'voltage')
      return null
    return {
      ...pressure,
      token: written.token,
      curve: { volts: written.factor, atUnit: curve.voltsAtUnit, perDecade: curve.voltsPerDecade },
    }
  }

  /** Name of the channel that keeps the volts of a channel. */
  voltsChannel(channel: string): string | null {
    return this.#byChannel.get(channelKey(channel))?.voltsChannel ?? null
  }
}
