/** The sheets of a permit as a page to be printed: what it shows is what hangs at the barrier. */
import { useEffect, useId, useState } from 'react'
import { Link } from 'react-router'
import type { Block, Paper, PaperFrame, Sheet } from '#app/domain/paper/blocks.ts'
import { Button, ButtonLink } from '../ui/button.tsx'
import { PaperDrawing } from './paper-drawing.tsx'
import './print-page.css'

export function PermitPrintPage({ paper: { frame, sheets } }: { paper: Paper }) {
  const [scripted, setScripted] = useState(false)
  useEffect(() => setScripted(true), [])
  const path = `/permits/${frame.number}`
  return (
    <main className="posted">
      <div className="mb-4 flex flex-wrap items-center gap-3 print:hidden">
        <h1 className="w-full">Sheets of {frame.number} for posting</h1>
        {scripted && (
          <Button type="button" kind="primary" onClick={() => window.print()}>
            Print {sheets.length} sheets
          </Button>
        )}
        <ButtonLink to={`${path}/permit.pdf`} reloadDocument>
          The same as a PDF file
        </ButtonLink>
        <Link to={path} className="link py-2">
          Back to the permit
        </Link>
      </div>
      {sheets.map((sheet, index) => (
        <PostedSheet
          key={sheet.key}
          frame={frame}
          sheet={sheet}
          place={`Sheet ${index + 1} of ${sheets.length}`}
        />
      ))}
    </main>
  )
}

function PostedSheet({ frame, sheet, place }: { frame: PaperFrame; sheet: Sheet; place: string }) {
  const headingId = useId()
  return (
    <section className="posted-sheet" aria-labelledby={headingId}>
      <div className="posted-head">
        <div className="posted-head-in">
          <div>
            <h2 id={headingId}>Heated-segment permit {frame.number}</h2>
            <div className="posted-title">
              {sheet.title} · {frame.site}
            </div>
            <div>{frame.revisionText}</div>
            <div>{frame.printedText}</div>
            <div className="font-semibold">{frame.standingText}</div>
          </div>
          <div className="posted-code">
            <span>
              <b>{frame.code}</b>Short code
            </span>
            <PaperDrawing drawing={frame.qr} className="posted-qr" />
          </div>
        </div>
        {frame.standing !== null && <div className="posted-standing">{frame.standing}</div>}
      </div>
      <div>
        {sheet.blocks.map((block, index) => (
          // biome-ignore lint/suspicious/noArrayIndexKey: blocks have no names and never change places
          <PostedBlock key={index} block={block} />
        ))}
      </div>
      <div className="posted-foot">
        <div className="posted-foot-in">
          <div>
            {frame.foot.map((text) => (
              <div key={text}>{text}</div>
            ))}
          </div>
          <b>{place}</b>
        </div>
      </div>
    </section>
  )
}

function PostedBlock({ block }: { block: Block }) {
  switch (block.kind) {
    case 'heading':
      return <h3>{block.text}</h3>
    case 'text':
      return (
        <p
          className={block.strong ? 'font-semibold' : undefined}
          style={block.size === undefined ? undefined : { fontSize: `${block.size}pt` }}
        >
          {block.text}
        </p>
      )
    case 'big':
      return (
        <p
          className="font-semibold break-words"
          style={{ fontSize: `min(${block.size}pt, 11vw)`, lineHeight: 1.15 }}
        >
          {block.text}
        </p>
      )
    case 'notice':
      return (
        <div className="posted-notice">
          <strong className="font-semibold">{block.title}</strong>
          <div>{block.text}</div>
        </div>
      )
    case 'facts':
      return (
        <table className="posted-table posted-facts">
          <tbody>
            {block.rows.map(([name, value]) => (
              <tr key={name}>
                <th scope="row">{name}</th>
                <td>{value}</td>
              </tr>
            ))}
          </tbody>
        </table>
      )
    case 'table':
      return <PostedTable block={block} />
    case 'drawing':
      return (
        <figure>
          <PaperDrawing drawing={block.drawing} className="posted-drawing" />
          <figcaption>{block.words}</figcaption>
        </figure>
      )
  }
}

function PostedTable({ block }: { block: Extract<Block, { kind: 'table' }> }) {
  const { name, columns, rows, blank = 0, rowHeight } = block
  const whole = columns.reduce((sum, { weight }) => sum + weight, 0)
  const height = rowHeight === undefined ? undefined : { height: `${rowHeight}pt` }
  return (
    <table className="posted-table" aria-label={name}>
      <thead>
        <tr>
          {columns.map(({ title, weight }) => (
            <th key={title} scope="col" style={{ width: `${(100 * weight) / whole}%` }}>
              {title}
            </th>
          ))}
        </tr>
      </thead>
      <tbody>
        {rows.map(([first, ...rest], index) => (
          // biome-ignore lint/suspicious/noArrayIndexKey: two rows may say the same
          <tr key={index} style={height}>
            <th scope="row">{first}</th>
            {rest.map((cell, column) => (
              // biome-ignore lint/suspicious/noArrayIndexKey: a cell is known by its column
              <td key={column} data-title={columns[column + 1]?.title}>
                {cell}
              </td>
            ))}
          </tr>
        ))}
        {Array.from({ length: blank }, (_, index) => (
          // biome-ignore lint/suspicious/noArrayIndexKey: empty rows are all alike
          <tr key={`blank-${index}`} style={height}>
            {columns.map(({ title }) => (
              <td key={title} />
            ))}
          </tr>
        ))}
      </tbody>
    </table>
  )
}
