/** From bytes to text: which encoding, and a streaming decoder that never stops on a bad byte. */

export type EncodingLabel = 'utf-8' | 'utf-16le' | 'utf-16be' | 'windows-1252'

export interface SniffedEncoding {
  label: EncodingLabel
  byteOrderMark: boolean
}

/**
 * Encoding from the first bytes: byte order mark, else the pattern of NUL bytes that Latin text makes in UTF-16,
 * else UTF-8. Bytes that are no UTF-8 are noticed later, by the decoder.
 */
export function sniffEncoding(head: Uint8Array): SniffedEncoding {
  if (head[0] === 0xef && head[1] === 0xbb && head[2] === 0xbf) return { label: 'utf-8', byteOrderMark: true }
  if (head[0] === 0xff && head[1] === 0xfe) return { label: 'utf-16le', byteOrderMark: true }
  if (head[0] === 0xfe && head[1] === 0xff) return { label: 'utf-16be', byteOrderMark: true }
  const length = Math.min(head.length, 4096)
  const zeros: [number, number] = [0, 0]
  for (let i = 0; i < length; i++) {
    if (head[i] === 0) zeros[i % 2 === 0 ? 0 : 1] += 1
  }
  const half = length / 2
  // Both a share of the bytes and a clear side: a block of NULs from a disk fault fills both sides alike.
  if (half >= 4 && zeros[1] > 0.6 * half && zeros[0] < 0.1 * half)
    return { label: 'utf-16le', byteOrderMark: false }
  if (half >= 4 && zeros[0] > 0.6 * half && zeros[1] < 0.1 * half)
    return { label: 'utf-16be', byteOrderMark: false }
  return { label: 'utf-8', byteOrderMark: false }
}

/**
 * Decodes chunk by chunk. Text that claims to be UTF-8 and turns out not to be is read as windows-1252 from the
 * first chunk with a byte above 127 on, since only then does the difference show; if valid UTF-8 letters came
 * before, the bad bytes become U+FFFD instead, and `badBytes` says so.
 */
export class StreamDecoder {
  label: EncodingLabel
  badBytes = false
  readonly #byteOrderMark: boolean
  #decoder: TextDecoder
  #sawMultiByte = false
  /** Bytes of a letter cut by the end of a chunk. */
  #rest = new Uint8Array(0)

  constructor(sniffed: SniffedEncoding) {
    this.label = sniffed.label
    this.#byteOrderMark = sniffed.byteOrderMark
    this.#decoder = new TextDecoder(sniffed.label)
  }

  push(chunk: Uint8Array): string {
    if (this.label !== 'utf-8') return this.#decoder.decode(chunk, { stream: true })
    const bytes = this.#rest.length === 0 ? chunk : joinBytes(this.#rest, chunk)
    const end = completeUtf8Length(bytes)
    this.#rest = bytes.slice(end)
    return this.#decodeUtf8(bytes.subarray(0, end))
  }

  end(): string {
    if (this.label !== 'utf-8') return this.#decoder.decode()
    const rest = this.#rest
    this.#rest = new Uint8Array(0)
    return this.#decodeUtf8(rest)
  }

  #decodeUtf8(bytes: Uint8Array): string {
    if (bytes.length === 0) return ''
    const ignoreBOM = this.#sawAny
    this.#sawAny = true
    try {
      const text = new TextDecoder('utf-8', { fatal: true, ignoreBOM }).decode(bytes)
      if (!this.#sawMultiByte && text.length !== bytes.length) this.#sawMultiByte = true
      return text
    } catch {
      // Only `fatal` throws here, and only for bytes that are no UTF-8: that is the finding, not a failure.
      if (this.#sawMultiByte || this.#byteOrderMark) {
        this.badBytes = true
        return new TextDecoder('utf-8', { ignoreBOM }).decode(bytes)
      }
      this.label = 'windows-1252'
      this.#decoder = new TextDecoder('windows-1252')
      return this.#decoder.decode(bytes, { stream: true })
    }
  }

  #sawAny = false
}

function joinBytes(a: Uint8Array, b: Uint8Array): Uint8Array {
  const joined = new Uint8Array(a.length + b.length)
  joined.set(a, 0)
  joined.set(b, a.length)
  return joined
}

/** Length without a letter that the end of the chunk cut in two. */
function completeUtf8Length(bytes: Uint8Array): number {
  const n = bytes.length
  for (let back = 1; back <= Math.min(3, n); back++) {
    const byte = bytes[n - back] as number
    if (byte < 0x80) return n
    if (byte >= 0xc0) {
      const need = byte >= 0xf0 ? 4 : byte >= 0xe0 ? 3 : 2
      return need > back ? n - back : n
    }
  }
  return n
}

/** Pairs made by reading UTF-8 as an 8-bit encoding; mended in labels only, never in values. */
const BROKEN_PAIRS: readonly [string, string][] = [
  ['Â°', '°'],
  ['Âµ', 'µ'],
  ['Î¼', 'µ'],
  ['Ã©', 'é'],
  ['Ã¼', 'ü'],
  ['Ã¶', 'ö'],
  ['Ã¤', 'ä'],
  ['â„ƒ', '°C'],
  ['Î©', 'Ω'],
]

/** A label with known broken pairs mended; everything else stays as it is. */
export function mendLabel(label: string): string {
  let mended = label
  for (const [broken, whole] of BROKEN_PAIRS) mended = mended.split(broken).join(whole)
  return mended
}
