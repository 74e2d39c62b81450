/**
 * Writes the files of the last three nights, and the copy that a hand made, into seeds/night-files:
 * `npx tsx seeds/write-night-files.ts`. With the word `bakes` it simulates the bakes anew before.
 */
import { mkdirSync, writeFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { bakeName, simulateBake } from './readings/bake-simulation.ts'
import { demoNights } from './readings/calendar.ts'
import { BAKES } from './scenario/bakes.ts'

function writeBakeTables(): void {
  const fourDigits = (values: number[]) => values.map((value) => Number(value.toPrecision(4)))
  const tables = BAKES.map((bake) => {
    const { water, hydrogen } = simulateBake(bake)
    return [bakeName(bake), { water: fourDigits(water), hydrogen: fourDigits(hydrogen) }]
  })
  const path = fileURLToPath(new URL('./readings/bake-tables.json', import.meta.url))
  writeFileSync(path, `${JSON.stringify(Object.fromEntries(tables))}\n`)
}

async function writeNights(): Promise<void> {
  // These read the tables when they are loaded.
  const { anyNightFile, LOGGER_CODES } = await import('./readings/any-night.ts')
  const { handExport } = await import('./readings/hand-export.ts')
  const folder = fileURLToPath(new URL('./night-files/', import.meta.url))
  mkdirSync(folder, { recursive: true })
  const nights = demoNights().slice(-3)
  const files = nights.flatMap((night) => LOGGER_CODES.map((source) => anyNightFile(source, night)))
  for (const file of [...files, handExport()]) {
    if (file === null) continue
    writeFileSync(`${folder}${file.fileName}`, file.bytes)
    console.log(`${file.fileName}: ${file.lineCount} lines, ${file.bytes.length} bytes`)
  }
}

if (process.argv[2] === 'bakes') writeBakeTables()
await writeNights()
