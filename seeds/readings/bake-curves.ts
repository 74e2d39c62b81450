/**
 * Pressure through a bake. The simulation behind it is kept as a table of four digits: night files must come out byte
 * for byte the same, also after the solver has been made faster. A test holds the table against the simulation.
 */
import { readFileSync } from 'node:fs'
import { z } from 'zod'
import { nitrogenEquivalent } from '../../app/physics/gauges.ts'
import type { DemoBake } from '../scenario/bakes.ts'
import { bakeName } from './bake-simulation.ts'

const HOUR_MS = 3_600_000
const numbers = z.array(z.number().positive())

/** Every bake's table by its name. */
export const BAKE_TABLES = z
  .record(z.string(), z.object({ water: numbers, hydrogen: numbers }))
  .parse(JSON.parse(readFileSync(new URL('./bake-tables.json', import.meta.url), 'utf8')))

export interface BakeCurve {
  /** Reading at the cross, Pa nitrogen-equivalent, for steel with so many times the hydrogen that the register says. */
  at: (atMs: number, steel: number) => number
}

/** Readings at the cross from the start of the ramp on; log p is straight between the hours. */
export function bakeCurve(bake: DemoBake): BakeCurve {
  const table = BAKE_TABLES[bakeName(bake)]
  if (table === undefined)
    throw new Error(`No table for the bake ${bakeName(bake)}; write it by seeds/write-night-files.ts`)
  const { water, hydrogen } = table
  const last = water.length - 1
  const logAt = (hour: number, steel: number) =>
    Math.log(nitrogenEquivalent({ H2O: water[hour] as number, H2: (hydrogen[hour] as number) * steel }))
  return {
    at: (atMs, steel) => {
      const hour = Math.min(last, Math.max(0, (atMs - bake.rampAt.getTime()) / HOUR_MS))
      const before = Math.min(last - 1, Math.floor(hour))
      const share = hour - before
      return Math.exp((1 - share) * logAt(before, steel) + share * logAt(before + 1, steel))
    },
  }
}
