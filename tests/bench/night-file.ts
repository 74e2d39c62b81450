/** Night files of any length for the benches: wide, a value of its own for every channel and line. */

export const CHANNELS = 60
export const STEP_MS = 10_000
export const START_MS = Date.UTC(2026, 9, 1)
/** The product's time in the benches, after everything in their files. */
export const NOW = new Date(Date.UTC(2028, 11, 1))

/** A value as text. */
export function cell(line: number, channel: number): string {
  return `${1 + ((line * 7 + channel * 13) % 9)}.${String((line * 31 + channel) % 1000).padStart(3, '0')}e-08`
}

export const CHANNEL_NAMES = Array.from(
  { length: CHANNELS },
  (_, i) => `HC-${String(i + 1).padStart(2, '0')}A`,
)
const HEADER = `time,${CHANNEL_NAMES.map((name) => `${name} (Pa)`).join(',')}\n`

/** How many lines make up a file of so many bytes. */
export function linesFor(bytes: number): number {
  return Math.floor(bytes / (CHANNELS * (cell(1, 1).length + 1) + 25))
}

/** Lines of a night file, in pieces of about 64 KiB. */
export function* nightFile(startMs: number, lines: number): Generator<Uint8Array> {
  let text = HEADER
  for (let line = 0; line < lines; line += 1) {
    const cells = CHANNEL_NAMES.map((_, channel) => cell(line, channel)).join(',')
    text += `${new Date(startMs + line * STEP_MS).toISOString()},${cells}\n`
    if (text.length < 65_536) continue
    yield Buffer.from(text)
    text = ''
  }
  yield Buffer.from(text)
}
