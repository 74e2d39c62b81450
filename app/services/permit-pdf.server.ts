/** The sheets of a permit as a PDF file: A4, black on white, head and foot on every page. */
import type { Block, Column, Paper, Sheet } from '../domain/paper/blocks.ts'
import { type Line, lineHeight, PdfSetter, type Weight } from './pdf-setter.server.ts'

const PAGE = { width: 595.28, height: 841.89 }
const LEFT = 40
const WIDTH = PAGE.width - 2 * LEFT
const TOP = 30
const QR_SIDE = 70
const HEAD_WIDTH = WIDTH - QR_SIDE - 80
/** Type size of the large letters, where they have room. */
const LARGE = 25
/** Below the foot; most printers leave a few millimetres white. */
const MARGIN = 24
/** Height of the frame with the large letters, for what is not live. */
const STANDING = 40
const FOOT = 44
const BOTTOM = PAGE.height - MARGIN - FOOT
const BODY = 9
const SMALL = 8.2
const GAP = 7
const PAD = 2.2

/**
 * Sets the sheets, each on a page of its own or several.
 *
 * @param at becomes the file's own date
 */
export async function permitPdf(paper: Paper, at: Date): Promise<Buffer> {
  const { frame, sheets } = paper
  const setter = new PdfSetter({ title: `Heated-segment permit ${frame.number}`, author: frame.site, at })
  const head = headOf(setter, paper)
  const pages: Sheet[] = []
  for (const sheet of sheets) new SheetSetter(setter, head.bodyTop, () => pages.push(sheet)).set(sheet)
  for (const [index, sheet] of pages.entries()) {
    setter.doc.switchToPage(index)
    drawHead(setter, head, sheet)
    foot(setter, frame, `Page ${index + 1} of ${pages.length}`)
  }
  return setter.bytes()
}

interface Head {
  frame: Paper['frame']
  /** Lower edge of its words and of the code beside them. */
  bottom: number
  /** Where the sheet's own content begins. */
  bodyTop: number
}

/** The words of the head with their sizes, from the top. */
function headLines(frame: Paper['frame'], title: string): [text: string, size: number, weight: Weight][] {
  return [
    [`Heated-segment permit ${frame.number}`, 15, 600],
    [`${title} · ${frame.site}`, 10.5, 600],
    [frame.revisionText, BODY, 400],
    [frame.printedText, BODY, 400],
    [frame.standingText, BODY, 600],
  ]
}

/** As high as the longest of its sheets' titles and texts make it, the same on every page. */
function headOf(setter: PdfSetter, { frame, sheets }: Paper): Head {
  const heights = sheets.map(({ title }) =>
    headLines(frame, title).reduce(
      (sum, [text, size, weight]) =>
        sum + setter.lines(text, HEAD_WIDTH, size, weight).length * lineHeight(size),
      0,
    ),
  )
  const bottom = TOP + Math.max(QR_SIDE, ...heights) + 4
  return { frame, bottom, bodyTop: bottom + (frame.standing === null ? 0 : STANDING + 4) + 8 }
}

function put(
  setter: PdfSetter,
  text: string,
  y: number,
  size: number,
  weight: Weight,
  width = WIDTH,
): number {
  let at = y
  for (const line of setter.lines(text, width, size, weight)) {
    setter.draw(line, LEFT, at, size)
    at += lineHeight(size)
  }
  return at
}

function drawHead(setter: PdfSetter, { frame, bottom, bodyTop }: Head, sheet: Sheet): void {
  let y = TOP
  for (const [text, size, weight] of headLines(frame, sheet.title))
    y = put(setter, text, y, size, weight, HEAD_WIDTH)
  setter.drawing(frame.qr, LEFT + WIDTH - QR_SIDE, TOP)
  const beside = LEFT + WIDTH - QR_SIDE - 12
  const code = setter.line(frame.code, 11, 600)
  setter.draw(code, beside - code.width, TOP + 4, 11)
  const label = setter.line('Short code', 8, 400)
  setter.draw(label, beside - label.width, TOP + 20, 8)
  if (frame.standing !== null) {
    setter.doc
      .rect(LEFT, bottom, WIDTH, STANDING - 4)
      .lineWidth(3)
      .stroke('black')
    const size = Math.min(LARGE, (LARGE * (WIDTH - 20)) / setter.line(frame.standing, LARGE, 600).width)
    const line = setter.line(frame.standing, size, 600)
    setter.draw(line, LEFT + (WIDTH - line.width) / 2, bottom + 3, size)
  }
  setter.doc
    .moveTo(LEFT, bodyTop - 6)
    .lineTo(LEFT + WIDTH, bodyTop - 6)
    .lineWidth(1)
    .stroke('black')
}

function foot(setter: PdfSetter, frame: Paper['frame'], page: string): void {
  const top = PAGE.height - MARGIN - FOOT + 8
  setter.doc
    .moveTo(LEFT, top - 4)
    .lineTo(LEFT + WIDTH, top - 4)
    .lineWidth(0.6)
    .stroke('black')
  const end = setter.line(page, BODY, 600)
  let y = top
  for (const text of frame.foot) y = put(setter, text, y, 8, 400, WIDTH - end.width - 14)
  setter.draw(end, LEFT + WIDTH - end.width, top, BODY)
}

class SheetSetter {
  private y = 0

  constructor(
    private readonly setter: PdfSetter,
    private readonly top: number,
    private readonly begun: () => void,
  ) {}

  set(sheet: Sheet): void {
    this.page()
    for (const [index, block] of sheet.blocks.entries()) this.block(block, sheet.blocks[index + 1])
  }

  private page(): void {
    this.setter.doc.addPage()
    this.begun()
    this.y = this.top
  }

  /** Begins a page where what follows does not go on this one; what is taller than a page goes on all the same. */
  private room(height: number): void {
    if (this.y + height > BOTTOM && this.y > this.top) this.page()
  }

  private block(block: Block, next: Block | undefined): void {
    switch (block.kind) {
      case 'heading':
        // A heading stays with the beginning of what it is about.
        this.room(lineHeight(11.5) + 5 + this.beginningOf(next))
        this.y += 3
        this.text(block.text, 11.5, 600)
        this.y += 2
        return
      case 'text':
        this.text(block.text, block.size ?? BODY, block.strong ? 600 : 400)
        this.y += GAP - 2
        return
      case 'big':
        this.text(block.text, block.size, 600)
        this.y += block.size / 6
        return
      case 'notice':
        this.notice(block.title, block.text)
        return
      case 'facts':
        this.table(FACT_COLUMNS, block.rows, { head: false })
        return
      case 'table':
        this.table(
          block.columns,
          [...block.rows, ...Array.from({ length: block.blank ?? 0 }, () => block.columns.map(() => ''))],
          { head: true, rowHeight: block.rowHeight, whole: block.whole },
        )
        return
      case 'drawing':
        this.room(block.drawing.height + 30)
        this.setter.drawing(block.drawing, LEFT, this.y)
        this.y += block.drawing.height + 4
        this.text(block.words, BODY, 400)
        this.y += GAP
    }
  }

  /** Height of what must stand right below a heading, so that it is not left alone at the foot of a page. */
  private beginningOf(block: Block | undefined): number {
    if (block === undefined) return 0
    if (block.kind === 'drawing') return block.drawing.height
    if (block.kind !== 'table') return 40
    const places = columnPlaces(block.columns)
    const first = (block.rows[0] ?? []).map((cell, index) =>
      this.setter.lines(cell, (places[index]?.width ?? WIDTH) - 2 * PAD, SMALL, 400),
    )
    const rows = block.whole ? block.rows.length : 1
    const height = Math.max(block.rowHeight ?? 0, heightOf(first, SMALL)) * rows + 20
    return Math.min(height, (BOTTOM - this.top) * 0.7)
  }

  private text(text: string, size: number, weight: Weight): void {
    for (const line of this.setter.lines(text, WIDTH, size, weight)) {
      this.room(lineHeight(size))
      this.setter.draw(line, LEFT, this.y, size)
      this.y += lineHeight(size)
    }
  }

  private notice(title: string, text: string): void {
    const inner = WIDTH - 16
    const heads = this.setter.lines(title, inner, 10.5, 600)
    const lines = this.setter.lines(text, inner, BODY, 400)
    const height = heads.length * lineHeight(10.5) + lines.length * lineHeight(BODY) + 12
    this.room(height)
    this.setter.doc.rect(LEFT, this.y, WIDTH, height).lineWidth(1.6).stroke('black')
    let y = this.y + 6
    for (const line of heads) {
      this.setter.draw(line, LEFT + 8, y, 10.5)
      y += lineHeight(10.5)
    }
    for (const line of lines) {
      this.setter.draw(line, LEFT + 8, y, BODY)
      y += lineHeight(BODY)
    }
    this.y += height + GAP
  }

  private table(
    columns: readonly Column[],
    rows: readonly (readonly string[])[],
    { head: withHead, rowHeight = 0, whole = false }: TableLook,
  ): void {
    const places = columnPlaces(columns)
    const size = withHead ? SMALL : BODY
    const cut = (cells: readonly string[], bold: boolean) =>
      places.map(({ width }, index) =>
        this.setter.lines(cells[index] ?? '', width - 2 * PAD, size, bold || index === 0 ? 600 : 400),
      )
    const heads = withHead
      ? cut(
          columns.map(({ title }) => title),
          true,
        )
      : null
    const headHeight = heads === null ? 0 : heightOf(heads, size)
    if (whole) {
      const heights = rows.map((cells) => Math.max(rowHeight, heightOf(cut(cells, false), size)))
      this.room(heights.reduce((sum, height) => sum + height, headHeight))
    }
    let fresh = true
    const begin = () => {
      if (heads !== null) {
        this.row(heads, places, headHeight, size)
        this.setter.doc
          .moveTo(LEFT, this.y)
          .lineTo(LEFT + WIDTH, this.y)
          .lineWidth(1.2)
          .stroke('black')
      }
      fresh = false
    }
    for (const cells of rows) {
      let left = cut(cells, false)
      while (left.length > 0) {
        const height = Math.max(rowHeight, heightOf(left, size))
        const needed = height + (fresh ? headHeight : 0)
        if (this.y + needed > BOTTOM && this.y > this.top + headHeight) {
          const goesOnOne = this.top + headHeight + height <= BOTTOM
          // What goes on one page is not cut; the rest of a longer one follows on the next.
          if (goesOnOne || fresh) {
            this.page()
            fresh = true
          }
        }
        if (fresh) begin()
        const fits = Math.max(1, Math.floor((BOTTOM - this.y - 2 * PAD) / lineHeight(size)))
        const now = left.map((lines) => lines.slice(0, fits))
        const rest = left.map((lines) => lines.slice(fits))
        this.row(now, places, Math.max(rowHeight, heightOf(now, size)), size)
        this.setter.doc
          .moveTo(LEFT, this.y)
          .lineTo(LEFT + WIDTH, this.y)
          .lineWidth(0.5)
          .stroke('black')
        left = rest.some((lines) => lines.length > 0) ? rest : []
        if (left.length > 0) {
          this.page()
          fresh = true
        }
      }
    }
    this.y += GAP
  }

  private row(cells: readonly Line[][], places: readonly Place[], height: number, size: number): void {
    for (const [index, lines] of cells.entries()) {
      let y = this.y + PAD
      for (const line of lines) {
        this.setter.draw(line, (places[index]?.x ?? LEFT) + PAD, y, size)
        y += lineHeight(size)
      }
    }
    this.y += height
  }
}

interface TableLook {
  head: boolean
  rowHeight?: number | undefined
  whole?: boolean | undefined
}

interface Place {
  x: number
  width: number
}

const FACT_COLUMNS: Column[] = [
  { title: '', weight: 24 },
  { title: '', weight: 76 },
]

function columnPlaces(columns: readonly Column[]): Place[] {
  const whole = columns.reduce((sum, { weight }) => sum + weight, 0)
  let x = LEFT
  return columns.map(({ weight }) => {
    const width = (weight / whole) * WIDTH
    const place = { x, width }
    x += width
    return place
  })
}

function heightOf(cells: readonly Line[][], size: number): number {
  return Math.max(1, ...cells.map((lines) => lines.length)) * lineHeight(size) + 2 * PAD
}
