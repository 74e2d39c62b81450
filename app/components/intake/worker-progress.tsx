/** What the worker does with a large file at present, seen anew every two seconds. */
import { useEffect } from 'react'
import { Link, useRevalidator } from 'react-router'
import { Notice } from '../ui/notice.tsx'
import { sizeText } from './file-words.ts'

const EVERY_MS = 2_000

/** The part of an import that says how far the worker is. */
interface Worked {
  id: number
  state: string
  byteSize: number
  bytesDone: number
  takingInBy: number | null
  fault: string
}

export function WorkerProgress({ file }: { file: Worked }) {
  const reading = file.state === 'reading'
  const takingIn = file.state === 'read' && file.takingInBy !== null
  const { revalidate, state } = useRevalidator()
  const busy = reading || takingIn
  useEffect(() => {
    if (!busy || state !== 'idle') return
    const timer = setTimeout(() => {
      if (!document.hidden) void revalidate()
    }, EVERY_MS)
    return () => clearTimeout(timer)
  })
  return (
    <>
      {file.fault !== '' && (
        <Notice tone="bad" lead="Not done. ">
          {file.fault}
        </Notice>
      )}
      {reading && <Reading file={file} />}
      {takingIn && (
        <Notice lead="Being taken in. ">
          All of its readings become visible at one moment, when the last one is stored. You can leave this
          page. <SeeAgain id={file.id} />
        </Notice>
      )}
    </>
  )
}

function Reading({ file }: { file: Worked }) {
  const share = file.bytesDone / Math.max(1, file.byteSize)
  return (
    <Notice lead="Being read. ">
      A file of this size is read by the worker. You can leave this page; a restart of the product does no
      harm. <SeeAgain id={file.id} />
      <progress
        value={share}
        max={1}
        aria-label="Read"
        className="mt-2 block h-2 w-full max-w-md accent-vac"
      />
      <span role="status" className="text-sm">
        {Math.floor(share * 100)} % of {sizeText(file.byteSize)} read
      </span>
    </Notice>
  )
}

/** For where no script runs; with one the page looks by itself. */
function SeeAgain({ id }: { id: number }) {
  return (
    <noscript>
      <Link to={`/intake/${id}`} className="link inline-block py-0.5">
        See how far it is
      </Link>
    </noscript>
  )
}
