/** One received file: what it holds, what is odd about it, and what to do with it. */
import { Link } from 'react-router'
import { IMPORT_STATE_LABELS } from '#app/domain/imports.ts'
import { placeText } from '#app/domain/night-files/refusal-text.ts'
import type { ReadOut } from '#app/domain/night-files/types.ts'
import type { ImportPageData } from '#app/services/intake-pages.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { ButtonLink } from '../ui/button.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { Facts, PageHead, Panel } from '../ui/panel.tsx'
import { AnswersPanel } from './answers-panel.tsx'
import { ChannelsPanel } from './channels-panel.tsx'
import { DiscardPanel, QuestionsPanel, TakeIn } from './decisions.tsx'
import { cutReason, EarlierNotice } from './earlier-notice.tsx'
import { countOf, countText, sizeText } from './file-words.ts'
import { LinesPanel } from './lines-panel.tsx'
import { NotesPanel, RejectedPanel } from './rejected-panel.tsx'
import { StateTag, TONE_OF_STATE } from './state-tag.tsx'
import { WorkerProgress } from './worker-progress.tsx'

const WISH_LINKS = { asked: 'Withdrawal asked for', agreed: 'Withdrawal agreed to' } as const

export function ImportPage({
  file,
  readOut,
  targets,
  heldBefore,
  mayTakeIn,
  wish,
  copy,
  earlier,
  failure,
}: ImportPageData & { failure: ActionFailure | undefined }) {
  const waits = file.state === 'read' && file.takingInBy === null && mayTakeIn && readOut !== null
  const notWanted =
    copy !== null ? COPY_REASON : earlier?.relation === 'whole' ? cutReason(earlier.importId) : null
  return (
    <>
      <PageHead
        title={file.state === 'read' ? 'Check before taking in' : `Import ${file.id}`}
        crumbs={
          <>
            <Link to="/intake" className="link inline-block py-0.5">
              Log intake
            </Link>{' '}
            / {file.fileName}
          </>
        }
        actions={
          <>
            {file.attachmentId !== null && (
              <ButtonLink to={`/intake/${file.id}/original`} reloadDocument>
                Original file
              </ButtonLink>
            )}
            {file.state === 'accepted' && (
              <ButtonLink to={`/intake/${file.id}/withdrawal`}>
                {wish === null ? 'Withdraw' : WISH_LINKS[wish]}
              </ButtonLink>
            )}
            {waits && <TakeIn readOut={readOut} />}
          </>
        }
      >
        <StateTag word={IMPORT_STATE_LABELS[file.state]} tone={TONE_OF_STATE[file.state]} /> {file.fileName} ·{' '}
        {sizeText(file.byteSize)}
        {file.lineCount !== null && ` · ${countOf(file.lineCount, 'line', 'lines')}`} · sent
        {file.uploadedBy !== '' && ` by ${file.uploadedBy}`} <Instant at={file.uploadedAt} />
      </PageHead>
      <FormFailure failure={failure} />
      <Outcome file={file} />
      <WorkerProgress file={file} />
      {file.state === 'reading' && mayTakeIn && <DiscardPanel failure={failure} />}
      {file.state === 'reading' ? null : readOut === null ? (
        <Notice>These readings were typed by hand, so there is no file to look at.</Notice>
      ) : (
        <>
          {earlier !== null && <EarlierNotice importId={file.id} earlier={earlier} mayDecide={mayTakeIn} />}
          {copy !== null && <CopyNotice text={copy} />}
          {readOut.refusal !== null && <RefusalNotice refusal={readOut.refusal} />}
          {waits && <QuestionsPanel readOut={readOut} failure={failure} />}
          <div className="grid gap-x-4.5 xl:grid-cols-[minmax(0,1fr)_22rem]">
            <div className="min-w-0">
              {waits && notWanted !== null && <DiscardPanel failure={failure} reason={notWanted} />}
              <LinesPanel readOut={readOut} importId={file.id} heldBefore={heldBefore} />
              <RemarksPanel readOut={readOut} />
              <NotesPanel readOut={readOut} />
              <AnswersPanel readOut={readOut} />
              {waits && notWanted === null && <DiscardPanel failure={failure} />}
            </div>
            <div className="min-w-0">
              <FilePanel file={file} readOut={readOut} />
            </div>
          </div>
          <RejectedPanel readOut={readOut} importId={file.id} />
          {readOut.readings.total > 0 && <ChannelsPanel readOut={readOut} targets={targets} />}
        </>
      )}
    </>
  )
}

function Outcome({ file }: { file: ImportPageData['file'] }) {
  if (file.state === 'withdrawn') {
    return (
      <Notice tone="warn" lead="Withdrawn. ">
        None of its readings counts any more; they stay with this import.{' '}
        <Link to={`/intake/${file.id}/withdrawal`} className="link inline-block py-0.5">
          Who asked, agreed and did it
        </Link>
      </Notice>
    )
  }
  if (file.decidedAt === null) return null
  const who = file.decidedBy === null ? '' : ` by ${file.decidedBy}`
  return (
    <Notice>
      {IMPORT_STATE_LABELS[file.state]}
      {who} on <Instant at={file.decidedAt} />
      {file.state === 'accepted' &&
        `: ${countOf(file.readingCount ?? 0, 'reading', 'readings')} stored, ${countText(file.heldCount ?? 0)} held already, ${countText(file.conflictCount ?? 0)} beside a different one`}
      .{file.reason !== '' && ` Reason: ${file.reason}`}
    </Notice>
  )
}

const COPY_REASON = 'A copy with fewer digits of readings that are held in full.'

function CopyNotice({ text }: { text: string }) {
  return (
    <Notice tone="bad" lead="A rounded copy. ">
      {text}
    </Notice>
  )
}

function RefusalNotice({ refusal }: { refusal: NonNullable<ReadOut['refusal']> }) {
  const place = placeText(refusal)
  return (
    <Notice tone="bad" lead="Could not be read. ">
      {place !== '' && `In ${place}. `}Found: {refusal.found}. Expected: {refusal.expected}. {refusal.mend}
    </Notice>
  )
}

function RemarksPanel({ readOut }: { readOut: ReadOut }) {
  const gaps = readOut.gapTotal
  if (readOut.remarks.length === 0 && gaps === 0) return null
  return (
    <Panel title="Worth a look">
      {readOut.remarks.map((remark) => (
        <Notice key={`${remark.kind} ${remark.line} ${remark.channel}`} tone="warn" lead="">
          {remark.text}
          {remark.atMs !== null && (
            <>
              {' '}
              (<Instant at={new Date(remark.atMs)} />)
            </>
          )}
        </Notice>
      ))}
      {gaps > 0 && (
        <>
          <p>
            {countOf(gaps, 'gap', 'gaps')} of more than three periods. A gap stays a gap; nothing is filled
            in.
          </p>
          <ul className="mt-1 text-sm text-ink-2">
            {readOut.gaps.slice(0, 5).map((gap) => (
              <li key={`${gap.channel} ${gap.line}`}>
                {gap.channel}: <Instant at={new Date(gap.fromMs)} /> to <Instant at={new Date(gap.toMs)} />
              </li>
            ))}
          </ul>
        </>
      )}
    </Panel>
  )
}

const MARK_WORDS = { '.': 'point', ',': 'comma' } as const
const UNIT_FROM_WORDS: Record<NonNullable<ReadOut['dialect']['unitFrom']>, string> = {
  header: 'from the header',
  note: 'from a line above',
  'unit-row': 'from the row of units',
  column: 'from its own column',
  profile: 'from the profile of the source',
}

const AVERAGING_WORDS: Record<NonNullable<ReadOut['averaging']> | 'unsaid', string> = {
  momentary: 'a momentary value',
  mean: 'a mean over its period',
  'log-mean': 'a mean of logarithms over its period',
  unsaid: 'momentary or a mean: not said yet',
}

function FilePanel({ file, readOut }: { file: ImportPageData['file']; readOut: ReadOut }) {
  const { dialect, firstMs, lastMs } = readOut
  const unit =
    dialect.unit === null
      ? '–'
      : `${dialect.unit}${dialect.unitFrom === null ? '' : `, ${UNIT_FROM_WORDS[dialect.unitFrom]}`}`
  return (
    <Panel title="The file">
      <Facts
        items={[
          { name: 'Source', value: `${file.sourceCode}, ${file.sourceName}` },
          { name: 'Unit in the file', value: unit },
          {
            name: 'Decimal mark',
            value: dialect.decimalMark === null ? '–' : MARK_WORDS[dialect.decimalMark],
          },
          { name: 'Zone of its times', value: dialect.zone ?? '–' },
          { name: 'First reading', value: <BothClocks ms={firstMs} /> },
          { name: 'Last reading', value: <BothClocks ms={lastMs} /> },
          { name: 'Each reading is', value: AVERAGING_WORDS[readOut.averaging ?? 'unsaid'] },
          { name: 'Period', value: readOut.periodSeconds === null ? '–' : `${readOut.periodSeconds} s` },
          {
            name: 'Layout',
            value:
              dialect.layout === 'long'
                ? 'a row per channel and time'
                : dialect.layout === 'wide'
                  ? 'a row per time'
                  : '–',
          },
          { name: 'Encoding', value: dialect.encoding },
          { name: 'Read by', value: `rules ${readOut.readerVersion}, profile ${readOut.profileVersion}` },
        ]}
      />
      <p className="mt-2 text-sm text-ink-3">
        SHA-256 <span className="break-all">{file.sha256}</span>
      </p>
    </Panel>
  )
}

/** Site time, and UTC beside it: the place where a wrong zone shows. */
function BothClocks({ ms }: { ms: number | null }) {
  if (ms === null) return '–'
  const at = new Date(ms)
  return (
    <>
      <Instant at={at} />{' '}
      <span className="font-normal whitespace-nowrap text-ink-3">{at.toISOString().slice(11, 16)} UTC</span>
    </>
  )
}
