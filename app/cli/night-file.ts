/** Writes the demo's night file of a logger into data/night-files: `npx tsx app/cli/night-file.ts NL-T 2026-11-01`. */
import { mkdirSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { anyNightFile, FIRST_NIGHT, LAST_NIGHT, LOGGER_CODES } from '#seeds/readings/any-night.ts'

const FOLDER = fileURLToPath(new URL('../../data/night-files/', import.meta.url))

function isDay(text: string): boolean {
  const at = new Date(`${text}T12:00:00Z`)
  return !Number.isNaN(at.getTime()) && at.toISOString().slice(0, 10) === text
}

function writeNight(args: readonly string[]): string {
  const [code = '', night = ''] = args
  const source = LOGGER_CODES.find((one) => one === code)
  if (source === undefined) {
    throw new Error(
      `Found the logger "${code}"; expected one of ${LOGGER_CODES.join(', ')}. Give logger and night, such as NL-T 2026-11-01.`,
    )
  }
  if (!isDay(night) || night < FIRST_NIGHT || night > LAST_NIGHT) {
    throw new Error(
      `Found the night "${night}"; expected a day from ${FIRST_NIGHT} to ${LAST_NIGHT} as YYYY-MM-DD. The night's name is the day on which it begins.`,
    )
  }
  const file = anyNightFile(source, night)
  if (file === null)
    throw new Error(`${source} delivered no file for the night of ${night}. Choose another night.`)
  mkdirSync(FOLDER, { recursive: true })
  const path = join(FOLDER, file.fileName)
  writeFileSync(path, file.bytes)
  return `${path}: ${file.lineCount} lines, ${file.bytes.length} bytes`
}

try {
  console.log(writeNight(process.argv.slice(2)))
} catch (error) {
  console.error(error instanceof Error ? error.message : String(error))
  process.exitCode = 1
}
