/** The product's own typeface as PDF files need it: plain OpenType, unpacked from the web fonts that pages use. */
import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { inflateSync } from 'node:zlib'
import { z } from 'zod'

const require = createRequire(import.meta.url)

const HEADER_BYTES = 12
const ENTRY_BYTES = 16
const WOFF_HEADER_BYTES = 44
const WOFF_ENTRY_BYTES = 20

/**
 * Unpacks a WOFF 1.0 file into the font it carries. Table order, checksums and contents stay; only the packing goes.
 *
 * @throws Error when the file is no WOFF
 * @see WOFF File Format 1.0, W3C Recommendation of 13 December 2012, sections 3 to 5 (from memory, not verified)
 */
export function unpackWoff(woff: Buffer): Buffer {
  if (woff.toString('latin1', 0, 4) !== 'wOFF') throw new Error('Found a font file that is no WOFF')
  const count = woff.readUInt16BE(12)
  const tables = Array.from({ length: count }, (_, index) => {
    const at = WOFF_HEADER_BYTES + index * WOFF_ENTRY_BYTES
    const offset = woff.readUInt32BE(at + 4)
    const packed = woff.readUInt32BE(at + 8)
    const length = woff.readUInt32BE(at + 12)
    const body = woff.subarray(offset, offset + packed)
    return {
      tag: woff.subarray(at, at + 4),
      checksum: woff.readUInt32BE(at + 16),
      // A table that packing would not shorten is stored as it is.
      data: packed < length ? inflateSync(body) : body,
    }
  })
  const directory = Buffer.alloc(HEADER_BYTES + count * ENTRY_BYTES)
  const power = Math.floor(Math.log2(count))
  woff.copy(directory, 0, 4, 8)
  directory.writeUInt16BE(count, 4)
  directory.writeUInt16BE(2 ** power * 16, 6)
  directory.writeUInt16BE(power, 8)
  directory.writeUInt16BE(count * 16 - 2 ** power * 16, 10)
  const parts: Uint8Array[] = [directory]
  let offset = directory.length
  for (const [index, { tag, checksum, data }] of tables.entries()) {
    const at = HEADER_BYTES + index * ENTRY_BYTES
    tag.copy(directory, at)
    directory.writeUInt32BE(checksum, at + 4)
    directory.writeUInt32BE(offset, at + 8)
    directory.writeUInt32BE(data.length, at + 12)
    // Tables begin at multiples of four.
    const padding = (4 - (data.length % 4)) % 4
    parts.push(data, Buffer.alloc(padding))
    offset += data.length + padding
  }
  return Buffer.concat(parts)
}

/** Stretches of the alphabet that have a file of their own, the most used first. */
export const PRINT_FONTS = ['latin', 'latin-ext', 'greek', 'cyrillic', 'cyrillic-ext', 'vietnamese'] as const
export type PrintFont = (typeof PRINT_FONTS)[number]

const loaded = new Map<string, Buffer>()

/** IBM Plex Sans upright, regular or semi-bold, unpacked once a process. */
export function printFont(part: PrintFont, weight: 400 | 600): Buffer {
  const name = `@fontsource/ibm-plex-sans/files/ibm-plex-sans-${part}-${weight}-normal.woff`
  const known = loaded.get(name)
  if (known !== undefined) return known
  const font = unpackWoff(readFileSync(require.resolve(name)))
  loaded.set(name, font)
  return font
}

let ranges: Record<PrintFont, [from: number, to: number][]> | undefined

/** Code points of each file, as the package lists them: "U+0000-00FF,U+0131". */
function readRanges(): Record<PrintFont, [number, number][]> {
  const path = require.resolve('@fontsource/ibm-plex-sans/unicode.json')
  const listed = UnicodeSchema.parse(JSON.parse(readFileSync(path, 'utf8')))
  return Object.fromEntries(
    PRINT_FONTS.map((part) => [
      part,
      listed[part].split(',').map((range) => {
        const [from = '', to = from] = range.replace('U+', '').split('-')
        return [Number.parseInt(from, 16), Number.parseInt(to, 16)]
      }),
    ]),
  ) as Record<PrintFont, [number, number][]>
}

const UnicodeSchema = z.record(z.enum(PRINT_FONTS), z.string())

/** The file that has a letter; null where none has. */
export function printFontOf(letter: string): PrintFont | null {
  ranges ??= readRanges()
  const code = letter.codePointAt(0) ?? 0
  for (const part of PRINT_FONTS) {
    if (ranges[part].some(([from, to]) => code >= from && code <= to)) return part
  }
  return null
}
