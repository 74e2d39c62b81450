/** Sets text, tables and drawings on the pages of a PDF file. Lengths in points, y downwards. */
import PDFDocument from 'pdfkit'
import { runsOf } from '../domain/paper/blocks.ts'
import type { Drawing, Shape } from '../domain/paper/drawing.ts'
import { PRINT_FONTS, printFont, printFontOf } from './print-fonts.server.ts'

export type Weight = 400 | 600

/** A stretch of one line that is set in one font at one height. */
interface Piece {
  text: string
  font: string
  size: number
  /** Above the line's own baseline. */
  rise: number
  width: number
}
export interface Line {
  pieces: Piece[]
  width: number
}

/** Of the size: distance from one baseline to the next, and from the top of a line to its baseline. */
const LEADING = 1.24
const ASCENT = 0.95
const SHIFTED_SIZE = 0.7
/** Letters of no file show as this, which the first file has. */
const UNKNOWN = '\uFFFD'

export function lineHeight(size: number): number {
  return size * LEADING
}

export class PdfSetter {
  readonly doc: PDFKit.PDFDocument
  private readonly widths = new Map<string, number>()

  constructor(info: { title: string; author: string; at: Date }) {
    this.doc = new PDFDocument({
      size: 'A4',
      margin: 0,
      bufferPages: true,
      autoFirstPage: false,
      lang: 'en-GB',
      displayTitle: true,
      info: { Title: info.title, Author: info.author, CreationDate: info.at, ModDate: info.at },
    })
    for (const part of PRINT_FONTS) {
      for (const weight of [400, 600] as const)
        this.doc.registerFont(`${part}-${weight}`, printFont(part, weight))
    }
  }

  /** Breaks a text into lines of at most this width. A line feed in it begins a new one; a word too long is cut. */
  lines(text: string, width: number, size: number, weight: Weight): Line[] {
    return text.split('\n').flatMap((paragraph) => this.paragraph(paragraph, width, size, weight))
  }

  private paragraph(text: string, width: number, size: number, weight: Weight): Line[] {
    const lines: string[] = []
    const space = this.width(' ', size, weight)
    let line = ''
    // Word by word: a text has few different words, and each is measured once.
    let used = 0
    for (const word of text.split(' ')) {
      const own = this.width(word, size, weight)
      const longer = line === '' ? own : used + space + own
      if (longer <= width) {
        line = line === '' ? word : `${line} ${word}`
        used = longer
        continue
      }
      if (line !== '') lines.push(line)
      line = word
      used = own
      while (used > width && line.length > 1) {
        const cut = this.fitting(line, width, size, weight)
        lines.push(line.slice(0, cut))
        line = line.slice(cut)
        used = this.width(line, size, weight)
      }
    }
    return [...lines, line].map((each) => this.line(each, size, weight))
  }

  /** Letters of a word that go into a width, at least one. */
  private fitting(word: string, width: number, size: number, weight: Weight): number {
    let cut = word.length
    while (cut > 1 && this.width(word.slice(0, cut), size, weight) > width) cut -= 1
    return cut
  }

  line(text: string, size: number, weight: Weight): Line {
    const pieces = runsOf(text).flatMap((run): Piece[] => {
      const own = run.shift === 'none' ? size : size * SHIFTED_SIZE
      const rise = run.shift === 'raised' ? size * 0.34 : run.shift === 'lowered' ? -size * 0.14 : 0
      return byFont(run.text, weight).map((piece) => ({
        ...piece,
        size: own,
        rise,
        width: this.stringWidth(piece.text, piece.font, own),
      }))
    })
    return { pieces, width: pieces.reduce((sum, piece) => sum + piece.width, 0) }
  }

  private width(text: string, size: number, weight: Weight): number {
    return this.line(text, size, weight).width
  }

  private stringWidth(text: string, font: string, size: number): number {
    const key = `${font}/${text}`
    const known = this.widths.get(key)
    if (known !== undefined) return known * size
    const unit = this.doc.font(font).fontSize(100).widthOfString(text) / 100
    this.widths.set(key, unit)
    return unit * size
  }

  /** Draws a line with its upper edge at `y`. */
  draw(line: Line, x: number, y: number, size: number, color: 'black' | 'white' = 'black'): void {
    this.onBaseline(line, x, y + size * ASCENT, color)
  }

  private onBaseline(line: Line, x: number, y: number, color: 'black' | 'white'): void {
    let at = x
    this.doc.fillColor(color)
    for (const { text, font, size, rise, width } of line.pieces) {
      this.doc
        .font(font)
        .fontSize(size)
        .text(text, at, y - rise, { lineBreak: false, baseline: 'alphabetic' })
      at += width
    }
  }

  drawing({ shapes }: Drawing, x: number, y: number): void {
    this.doc.save().translate(x, y)
    for (const shape of shapes) this.shape(shape)
    this.doc.restore()
  }

  private shape(shape: Shape): void {
    const { doc } = this
    switch (shape.kind) {
      case 'line':
      case 'path': {
        const [first, ...rest] = shape.kind === 'line' ? [shape.from, shape.to] : shape.points
        if (first === undefined) return
        doc.moveTo(first[0], first[1])
        for (const [x, y] of rest) doc.lineTo(x, y)
        if (shape.dashed) doc.dash(4, { space: 3 })
        doc.lineWidth(shape.width).stroke('black')
        doc.undash()
        return
      }
      case 'rect':
        doc.rect(shape.x, shape.y, shape.width, shape.height)
        if (shape.fill !== undefined) doc.fill(shape.fill)
        else doc.lineWidth(shape.stroke ?? 1).stroke('black')
        return
      case 'polygon':
        doc.polygon(...shape.points.map(([x, y]): [number, number] => [x, y])).fill(shape.fill)
        return
      case 'text': {
        const line = this.line(shape.text, shape.size, shape.bold ? 600 : 400)
        const [x, y] = shape.at
        const share = shape.anchor === 'start' ? 0 : shape.anchor === 'middle' ? 0.5 : 1
        this.onBaseline(line, x - line.width * share, y, 'black')
      }
    }
  }

  /** Ends the file. */
  async bytes(): Promise<Buffer> {
    const chunks: Buffer[] = []
    const done = new Promise<void>((resolve, reject) => {
      this.doc.on('data', (chunk: Buffer) => chunks.push(chunk))
      this.doc.on('end', resolve)
      this.doc.on('error', reject)
    })
    this.doc.end()
    await done
    return Buffer.concat(chunks)
  }
}

/** Cuts a text where the font file changes. */
function byFont(text: string, weight: Weight): { text: string; font: string }[] {
  const pieces: { text: string; font: string }[] = []
  for (const letter of text) {
    const part = printFontOf(letter)
    const font = `${part ?? 'latin'}-${weight}`
    const shown = part === null ? UNKNOWN : letter
    const last = pieces.at(-1)
    if (last?.font === font) last.text += shown
    else pieces.push({ text: shown, font })
  }
  return pieces
}
