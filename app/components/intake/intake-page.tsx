/** The log intake: which nights are due, what came, and the form that takes the next file. */
import { Link } from 'react-router'
import { IMPORT_STATE_LABELS, type UploadFailure } from '#app/domain/imports.ts'
import type { IntakePageData, NightRow } from '#app/services/intake-pages.server.ts'
import type { UnfinishedUpload } from '#app/services/uploads.server.ts'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { countText } from './file-words.ts'
import { NIGHT_WORDS, StateTag, TONE_OF_STATE } from './state-tag.tsx'
import { UploadForm } from './upload-form.tsx'

/** A refused file brought no data, so its night still owes one. */
const OWED: readonly NightRow['state'][] = ['missing', 'expected', 'refused']

type FileRow = IntakePageData['files'][number]

const NIGHT_COLUMNS: Column<NightRow>[] = [
  { key: 'night', head: 'Night from', rowHead: true, cell: ({ night }) => night },
  {
    key: 'source',
    head: 'Source',
    cell: ({ sourceCode, sourceName }) => <span title={sourceName}>{sourceCode}</span>,
  },
  { key: 'state', head: 'State', nowrap: true, cell: ({ state }) => <StateTag {...NIGHT_WORDS[state]} /> },
  { key: 'due', head: 'Due', nowrap: true, cell: ({ dueAt }) => <Instant at={dueAt} /> },
  {
    key: 'file',
    head: 'File',
    cell: ({ file }) =>
      file === null ? (
        '–'
      ) : (
        <>
          <Link to={`/intake/${file.importId}`} className="link inline-block py-0.5">
            {file.fileName}
          </Link>
          <span className="text-ink-3">
            {' '}
            · {file.by === '' ? '' : `${file.by}, `}
            <Instant at={file.at} />
          </span>
        </>
      ),
  },
]

const FILE_COLUMNS: Column<FileRow>[] = [
  { key: 'id', head: 'Import', align: 'right', cell: ({ id }) => id },
  {
    key: 'file',
    head: 'File',
    rowHead: true,
    cell: ({ id, fileName }) => (
      <Link to={`/intake/${id}`} className="link inline-block py-0.5">
        {fileName}
      </Link>
    ),
  },
  { key: 'source', head: 'Source', cell: ({ sourceCode }) => sourceCode },
  {
    key: 'state',
    head: 'State',
    nowrap: true,
    cell: ({ id, state, wish, hasQuestion }) => (
      <>
        <StateTag word={IMPORT_STATE_LABELS[state]} tone={TONE_OF_STATE[state]} />
        {hasQuestion && (
          <Link to={`/intake/${id}#questions`} className="link ml-2 inline-block py-0.5">
            has a question
          </Link>
        )}
        {wish !== null && (
          <Link to={`/intake/${id}/withdrawal`} className="link ml-2 inline-block py-0.5">
            {wish === 'asked' ? 'withdrawal asked for' : 'withdrawal agreed to'}
          </Link>
        )}
      </>
    ),
  },
  {
    key: 'from',
    head: 'First reading',
    nowrap: true,
    cell: ({ firstAt }) => (firstAt === null ? '–' : <Instant at={firstAt} />),
  },
  {
    key: 'to',
    head: 'Last reading',
    nowrap: true,
    cell: ({ lastAt }) => (lastAt === null ? '–' : <Instant at={lastAt} />),
  },
  {
    key: 'readings',
    head: 'Readings',
    align: 'right',
    cell: ({ readingCount }) => (readingCount === null ? '–' : countText(readingCount)),
  },
  {
    key: 'sent',
    head: 'Sent',
    cell: ({ uploadedBy, uploadedAt }) => (
      <>
        {uploadedBy === '' ? '' : `${uploadedBy}, `}
        <Instant at={uploadedAt} />
      </>
    ),
  },
]

export function IntakePage({
  sources,
  nights,
  files,
  mayTakeIn,
  limitMib,
  formLimitMib,
  unfinished,
  failure,
}: IntakePageData & {
  limitMib: number
  formLimitMib: number
  unfinished: readonly UnfinishedUpload[]
  failure: UploadFailure | undefined
}) {
  const owed = nights.filter(({ state }) => OWED.includes(state)).length
  const waiting = files.filter(({ state }) => state === 'read').length
  return (
    <>
      <PageHead title="Log intake">
        {owed === 0
          ? 'Every file that the last three nights owe is here'
          : `${owed} ${owed === 1 ? 'file' : 'files'} of the last three nights ${owed === 1 ? 'is' : 'are'} not here yet`}
        {waiting > 0 && ` · ${waiting} ${waiting === 1 ? 'waits' : 'wait'} to be looked through`}
      </PageHead>
      {mayTakeIn && (
        <Panel title="Send a night file">
          <UploadForm
            sources={sources}
            limitMib={limitMib}
            formLimitMib={formLimitMib}
            unfinished={unfinished}
            failure={failure}
          />
        </Panel>
      )}
      <Panel title="The last three nights">
        <DataTable
          caption="Night files that are due, and what came"
          columns={NIGHT_COLUMNS}
          rows={nights}
          rowKey={({ night, sourceCode }) => `${night} ${sourceCode}`}
          empty="No source owes a file. Sources are set up in the register."
        />
      </Panel>
      <Panel title="Files received">
        <DataTable
          caption="The last files that were received, the newest first"
          columns={FILE_COLUMNS}
          rows={files}
          rowKey={({ id }) => id}
          empty="Nothing has been received yet."
        />
      </Panel>
    </>
  )
}
