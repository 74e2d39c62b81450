/** The PDF file of a permit and the page with the same sheets: one says what the other says. */
import { getDocument } from 'pdfjs-dist/legacy/build/pdf.mjs'
import { renderToStaticMarkup } from 'react-dom/server'
import { MemoryRouter } from 'react-router'
import { beforeAll, describe, expect, it } from 'vitest'
import { PermitPrintPage } from '#app/components/permits/print-page.tsx'
import { type Block, type Paper, runsOf } from '#app/domain/paper/blocks.ts'
import { type PaperFacts, permitPaper } from '#app/domain/permit-sheets.ts'
import { permitPdf } from '#app/services/permit-pdf.server.ts'
import { printFont, printFontOf, unpackWoff } from '#app/services/print-fonts.server.ts'
import { paperFacts } from '#tests/support/paper-facts.ts'

/** Setting and reading back is work for the processor, which a busy machine gives slowly. */
const PATIENCE_MS = 60_000
const PRINTED_AT = new Date('2026-11-10T09:00:00.000Z')

/** Words run together, raised figures as plain ones: what is left when lines are broken here or there. */
function squeezed(text: string): string {
  return runsOf(text)
    .map((run) => run.text)
    .join('')
    .replaceAll(/\s+/g, '')
}

async function pagesOf(paper: Paper): Promise<string[]> {
  const file = await permitPdf(paper, PRINTED_AT)
  const pdf = await getDocument({ data: new Uint8Array(file), useSystemFonts: false }).promise
  const pages: string[] = []
  for (let number = 1; number <= pdf.numPages; number += 1) {
    const { items } = await (await pdf.getPage(number)).getTextContent()
    pages.push(items.map((item) => ('str' in item ? item.str : '')).join(' '))
  }
  return pages
}

function pageText(paper: Paper): string {
  return renderToStaticMarkup(
    <MemoryRouter>
      <PermitPrintPage paper={paper} />
    </MemoryRouter>,
  )
    .replaceAll(/<[^>]+>/g, ' ')
    .replaceAll('&#x27;', "'")
    .replaceAll('&quot;', '"')
    .replaceAll('&amp;', '&')
}

function textsOf(block: Block): string[] {
  switch (block.kind) {
    case 'heading':
    case 'text':
    case 'big':
      return [block.text]
    case 'notice':
      return [block.title, block.text]
    case 'facts':
      return block.rows.flat()
    case 'table':
      return [...block.columns.map(({ title }) => title), ...block.rows.flat()]
    case 'drawing':
      return [
        block.words,
        ...block.drawing.shapes.flatMap((shape) => (shape.kind === 'text' ? [shape.text] : [])),
      ]
  }
}

function everything({ frame, sheets }: Paper): string[] {
  return [
    frame.number,
    frame.revisionText,
    frame.printedText,
    frame.standing ?? '',
    frame.standingText,
    frame.code,
    ...frame.foot,
    ...sheets.flatMap(({ title, blocks }) => [title, ...blocks.flatMap(textsOf)]),
  ]
}

describe('the PDF file of a permit', { timeout: PATIENCE_MS }, () => {
  let facts: PaperFacts
  let paper: Paper
  let pages: string[]
  beforeAll(async () => {
    facts = paperFacts()
    paper = permitPaper(facts)
    pages = await pagesOf(paper)
  }, PATIENCE_MS)

  it('says everything that the sheets say, and so does the page', () => {
    const inPdf = squeezed(pages.join(' '))
    const onPage = squeezed(pageText(paper))
    for (const text of everything(paper)) {
      expect(inPdf, text).toContain(squeezed(text))
      expect(onPage, text).toContain(squeezed(text))
    }
    // Signs that a typeface may lack, as they are read out of the file again.
    for (const word of ['150°C', '5×10−8Pa·m3/s', 'atleast3Ω', 'Ω']) expect(inPdf).toContain(word)
  })

  it('has number, revision, print time with offset, code and page on every page', () => {
    for (const [index, page] of pages.entries()) {
      for (const text of [
        'HSP-2026-101',
        'Revision 5',
        'Printed 2026-11-10 10:00 (UTC+01:00)',
        'K7M4QR',
        `Page ${index + 1} of ${pages.length}`,
        'may be out of date',
      ]) {
        expect(squeezed(page), `${text} on page ${index + 1}`).toContain(squeezed(text))
      }
    }
    expect(pages).toHaveLength(7)
  })

  it('says in large letters on every page that a draft is not a permit', async () => {
    const draft = await pagesOf(permitPaper(paperFacts({ state: 'draft', approvedVersion: null })))
    for (const page of draft) expect(page).toContain('DRAFT: NOT A PERMIT')
    for (const page of pages) expect(page).not.toContain('NOT A PERMIT')
  })

  it('keeps its head clear of the frame below it, however much there is to say', async () => {
    const changed = permitPaper(
      paperFacts({ state: 'requested', version: 2, printed: { at: PRINTED_AT, by: 'Ann '.repeat(60) } }),
    )
    const pdf = await getDocument({ data: new Uint8Array(await permitPdf(changed, PRINTED_AT)) }).promise
    const { items } = await (await pdf.getPage(1)).getTextContent()
    const place = (start: string): number => {
      const found = items.find((item) => 'str' in item && item.str.includes(start))
      return found !== undefined && 'transform' in found ? Number(found.transform[5]) : Number.NaN
    }
    // Upwards on the page: the last words of the head, the large letters, the first heading.
    expect(place('strength of it')).toBeGreaterThan(place('REQUESTED: APPROVAL VOID') + 20)
    expect(place('REQUESTED: APPROVAL VOID')).toBeGreaterThan(place('Bake at') + 10)
  })

  it('begins with SUSPENDED while work is stopped', async () => {
    const stopped = { at: PRINTED_AT, by: 'Carl Ny', reason: 'Fan stopped', madeSafe: null }
    const [first] = await pagesOf(permitPaper(paperFacts({ state: 'suspended', stopped })))
    expect(squeezed(first ?? '')).toContain('SUSPENDEDHSP-2026-101SG-T1Noworkhere.Keepout.')
  })

  it('carries a text of any length over to further pages and loses none of it', async () => {
    const long = Array.from({ length: 900 }, (_, index) => `word${index}`).join(' ')
    const hazards = facts.hazards.map((hazard) => ({ ...hazard, text: long }))
    const one = 'x'.repeat(400)
    const many = await pagesOf(permitPaper(paperFacts({ hazards, terms: one })))
    expect(many.length).toBeGreaterThan(pages.length)
    const text = squeezed(many.join(' '))
    for (const word of ['word0word1', 'word450word451', 'word898word899']) expect(text).toContain(word)
    expect(text.replaceAll(/[^x]/g, '').length).toBeGreaterThanOrEqual(400)
  })

  it('is the same file for the same sheets', async () => {
    const [one, two] = await Promise.all([permitPdf(paper, PRINTED_AT), permitPdf(paper, PRINTED_AT)])
    expect(one.equals(two)).toBe(true)
  })
})

describe('the typeface of the PDF file', () => {
  it('is unpacked into a font whose tables are where its directory says', () => {
    const font = printFont('latin', 400)
    const count = font.readUInt16BE(4)
    const tables = Array.from({ length: count }, (_, index) => {
      const at = 12 + index * 16
      return {
        tag: font.toString('latin1', at, at + 4),
        offset: font.readUInt32BE(at + 8),
        length: font.readUInt32BE(at + 12),
      }
    })
    expect(tables.map(({ tag }) => tag)).toEqual(
      expect.arrayContaining(['cmap', 'glyf', 'head', 'hmtx', 'loca']),
    )
    for (const { tag, offset, length } of tables) {
      expect(offset % 4, tag).toBe(0)
      expect(offset + length, tag).toBeLessThanOrEqual(font.length)
    }
    // Magic number of the table "head" (OpenType specification 1.9, table head; from memory, not verified).
    const head = tables.find(({ tag }) => tag === 'head')
    expect(font.readUInt32BE((head?.offset ?? 0) + 12)).toBe(0x5f0f3cf5)
  })

  it('is refused when the file is something else', () => {
    expect(() => unpackWoff(Buffer.from('OTTO and more that is no web font'))).toThrow('no WOFF')
  })

  it('is found by letter, and a letter that no file has is told', () => {
    expect(printFontOf('°')).toBe('latin')
    expect(printFontOf('Ω')).toBe('greek')
    expect(printFontOf('ő')).toBe('latin-ext')
    expect(printFontOf('漢')).toBeNull()
  })
})
