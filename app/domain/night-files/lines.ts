import { MAX_LINE_CHARS } from './limits.ts'

/** Kinds of line ends met: CR LF, LF, CR, and the CR CR LF of doubly converted files. */
export interface LineEndCounts {
  crlf: number
  lf: number
  cr: number
  crcrlf: number
}

const CR = 13
const LF = 10

/** Cuts decoded text into physical lines, however the chunks fall. */
export class LineSplitter {
  readonly ends: LineEndCounts = { crlf: 0, lf: 0, cr: 0, crcrlf: 0 }
  #rest = ''
  /** Set while the tail of an overlong line is being thrown away. */
  #swallowing = false
  readonly #onLine: (text: string, terminated: boolean, tooLong: boolean) => void

  constructor(onLine: (text: string, terminated: boolean, tooLong: boolean) => void) {
    this.#onLine = onLine
  }

  push(text: string): void {
    this.#cut(this.#rest === '' ? text : this.#rest + text, false)
  }

  end(): void {
    this.#cut(this.#rest, true)
    if (this.#rest !== '' || this.#swallowing) this.#hand(this.#rest, false)
    this.#rest = ''
  }

  #hand(text: string, terminated: boolean): void {
    const tooLong = this.#swallowing || text.length > MAX_LINE_CHARS
    this.#swallowing = false
    this.#onLine(text, terminated, tooLong)
  }

  #cut(text: string, final: boolean): void {
    const length = text.length
    let start = 0
    let cr = text.indexOf('\r')
    let lf = text.indexOf('\n')
    while (cr !== -1 || lf !== -1) {
      let stop: number
      let next: number
      if (lf !== -1 && (cr === -1 || lf < cr)) {
        stop = lf
        next = lf + 1
        this.ends.lf += 1
      } else {
        stop = cr
        // What follows a CR decides what it is, so one at the very end of a chunk waits.
        if (!final && cr + 1 >= length) break
        if (text.charCodeAt(cr + 1) === LF) {
          next = cr + 2
          this.ends.crlf += 1
        } else if (text.charCodeAt(cr + 1) === CR) {
          if (!final && cr + 2 >= length) break
          if (text.charCodeAt(cr + 2) === LF) {
            next = cr + 3
            this.ends.crcrlf += 1
          } else {
            next = cr + 1
            this.ends.cr += 1
          }
        } else {
          next = cr + 1
          this.ends.cr += 1
        }
      }
      this.#hand(text.slice(start, stop), true)
      start = next
      if (cr !== -1 && cr < next) cr = text.indexOf('\r', next)
      if (lf !== -1 && lf < next) lf = text.indexOf('\n', next)
    }
    this.#rest = text.slice(start)
    if (this.#rest.length > MAX_LINE_CHARS + 2 && cr === -1) {
      this.#rest = ''
      this.#swallowing = true
    }
  }
}

/**
 * Counts lines straight on the bytes, knowing nothing of fields, quotes or decoding besides the width of a code
 * unit: the independent figure that the outcomes of the reader have to add up to.
 */
export class LineCounter {
  #lines = 0
  #returns = 0
  #open = false
  #offset = 0
  readonly #wide: boolean
  /** Position of the high byte within a 16-bit unit. */
  readonly #highAt: number
  #pending = -1
  readonly #skip: number

  constructor(encoding: string, byteOrderMark: boolean) {
    this.#wide = encoding === 'utf-16le' || encoding === 'utf-16be'
    this.#highAt = encoding === 'utf-16be' ? 0 : 1
    this.#skip = byteOrderMark ? (this.#wide ? 2 : 3) : 0
  }

  push(chunk: Uint8Array): void {
    for (let i = 0; i < chunk.length; i++) {
      const byte = chunk[i] as number
      const at = this.#offset
      this.#offset += 1
      if (at < this.#skip) continue
      if (!this.#wide) this.#unit(byte)
      else if (this.#pending === -1) this.#pending = byte
      else {
        const unit = this.#highAt === 1 ? this.#pending | (byte << 8) : (this.#pending << 8) | byte
        this.#pending = -1
        this.#unit(unit)
      }
    }
  }

  #unit(unit: number): void {
    if (unit === LF) {
      this.#lines += Math.max(this.#returns - 2, 0) + 1
      this.#returns = 0
      this.#open = false
    } else if (unit === CR) {
      this.#returns += 1
      this.#open = false
    } else {
      this.#lines += this.#returns
      this.#returns = 0
      this.#open = true
    }
  }

  /** Lines so far, an unfinished last one included. */
  total(): number {
    return this.#lines + this.#returns + (this.#open || this.#pending !== -1 ? 1 : 0)
  }
}

/** Runs of NUL bytes, as a disk fault leaves them: where they start and end in the file, in bytes. */
export class NulScanner {
  readonly ranges: { from: number; to: number }[] = []
  #offset = 0

  push(chunk: Uint8Array): void {
    let at = chunk.indexOf(0)
    while (at !== -1) {
      let end = at
      while (end < chunk.length && chunk[end] === 0) end += 1
      const last = this.ranges[this.ranges.length - 1]
      const from = this.#offset + at
      const to = this.#offset + end - 1
      if (last !== undefined && last.to === from - 1) last.to = to
      else if (this.ranges.length < 100) this.ranges.push({ from, to })
      at = chunk.indexOf(0, end)
    }
    this.#offset += chunk.length
  }
}
