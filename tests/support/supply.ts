/** A supply set with its two meters, for tests of heating. */
import type { DbOrTx } from '#app/db/client.server.ts'
import { reading, supplySet } from '#app/db/schema/index.ts'
import { qualityCode } from '#app/domain/readings.ts'
import { createChannel, createPosition, createSource } from './factories.ts'

export interface TestSupply {
  tag: string
  /** Stores what its logger posted at an instant: figures, or the word OFF. */
  posts(at: Date, output: { volts: number; amps: number } | 'off'): Promise<void>
}

/** A set of 1 500 A whose logger has posted nothing yet. */
export async function createSupply(db: DbOrTx, tag = 'HX-1'): Promise<TestSupply> {
  await db.insert(supplySet).values({ tag, maxAmps: 1500, maxVolts: 60, openCircuitVolts: 75 })
  const source = await createSource(db)
  const channels: number[] = []
  for (const [suffix, kind, quantity] of [
    ['U', 'supply-volts', 'voltage'],
    ['I', 'supply-amps', 'current'],
  ] as const) {
    const position = await createPosition(db, { tag: `${tag}-${suffix}`, kind, quantity })
    channels.push((await createChannel(db, { sourceId: source.id, positionId: position.id })).id)
  }
  let line = 0
  return {
    tag,
    async posts(at, output) {
      line += 1
      await db.insert(reading).values(
        channels.map((channelId, index) => ({
          channelId,
          at,
          value: output === 'off' ? null : index === 0 ? output.volts : output.amps,
          quality: qualityCode(output === 'off' ? 'off' : 'good'),
          importId: 1,
          lineNo: line,
        })),
      )
    },
  }
}
