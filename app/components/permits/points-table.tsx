/** Isolation points of a permit: what is locked in which position, by which lock, put on and verified by whom. */
import type { LockDone, PointLine } from '#app/services/isolation-points.server.ts'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'

const COLUMNS: readonly Column<PointLine>[] = [
  { key: 'tag', head: 'Point', rowHead: true, cell: ({ tag }) => tag },
  {
    key: 'isolates',
    head: 'What is locked',
    cell: ({ isolates, purpose, asked }) => (
      <>
        {isolates}
        {purpose === 'to-work' && <span className="block text-sm text-ink-3">keeps heating from people</span>}
        {!asked && <span className="block text-sm text-warn">no longer among the terms</span>}
      </>
    ),
  },
  { key: 'required', head: 'Position', cell: ({ required }) => required },
  {
    key: 'lock',
    head: 'Lock',
    nowrap: true,
    cell: ({ lock }) => (lock === null ? '–' : <LockNumber lock={lock} />),
  },
  {
    key: 'applied',
    head: 'Applied',
    cell: ({ lock }) => (lock === null ? <NotYet /> : <Done {...lock.applied} />),
  },
  {
    key: 'verified',
    head: 'Verified',
    cell: ({ lock }) => (lock?.verified == null ? <NotYet /> : <Done {...lock.verified} />),
  },
  {
    key: 'removed',
    head: 'Taken away',
    cell: ({ lock }) => (lock?.removed == null ? '–' : <Removed {...lock.removed} />),
  },
]

const HOW = {
  owner: '',
  'owner-absent': 'owner absent, by the written procedure',
  transferred: 'to another permit',
}

function LockNumber({ lock }: { lock: NonNullable<PointLine['lock']> }) {
  return (
    <>
      <span className={lock.removed === null ? 'font-semibold' : 'line-through'}>{lock.number}</span>
      {lock.tagNumber !== '' && <span className="block text-sm text-ink-3">tag {lock.tagNumber}</span>}
    </>
  )
}

function Done({ by, witness, at }: LockDone) {
  return (
    <>
      {by} <Instant at={at} className="text-ink-2" />
      {witness !== null && <span className="block text-sm text-ink-3">entered by {witness}</span>}
    </>
  )
}

function Removed({ how, ...done }: NonNullable<NonNullable<PointLine['lock']>['removed']>) {
  return (
    <>
      <Done {...done} />
      {how !== null && HOW[how] !== '' && <span className="block text-sm text-ink-3">{HOW[how]}</span>}
    </>
  )
}

/** Bordered as well as coloured, so that it stands out in print. */
function NotYet() {
  return (
    <span className="rounded-sm border border-warn bg-warn-soft px-1.5 text-sm whitespace-nowrap text-warn">
      not yet
    </span>
  )
}

export function PointsTable({ lines }: { lines: readonly PointLine[] }) {
  const removed = lines.some(({ lock }) => lock?.removed != null)
  return (
    <DataTable
      caption="Isolation points with their locks"
      columns={removed ? COLUMNS : COLUMNS.filter(({ key }) => key !== 'removed')}
      rows={lines}
      rowKey={({ tag, lock }) => `${tag}/${lock?.id ?? 0}`}
      empty="This permit names no isolation points."
    />
  )
}
