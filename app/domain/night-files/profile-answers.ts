import { type SourceProfile, SourceProfileSchema } from '../schemas/source-profile.ts'
import { floorOf } from './questions.ts'
import type { Answer, ReadOut } from './types.ts'
import { unitOf } from './units.ts'

/**
 * The profile of a source with what a file and the answers to its questions have settled, one version on; null when
 * they add nothing. Answers that concern this one file only (when it started, which rows to doubt) stay out. A later
 * file that departs from the profile is asked about again.
 *
 * @param readOut the file as read with these answers, in a state in which it may be taken in
 */
export function profileWithAnswers(profile: SourceProfile, readOut: ReadOut): SourceProfile | null {
  const draft: SourceProfile = structuredClone(profile)
  for (const answer of readOut.answers) learn(draft, answer, readOut)
  if (readOut.state === 'readable') fillOpen(draft, readOut)
  const next = SourceProfileSchema.parse(draft)
  if (JSON.stringify(next) === JSON.stringify(SourceProfileSchema.parse(profile))) return null
  return { ...next, version: profile.version + 1 }
}

function learn(draft: SourceProfile, { id, choice, found }: Answer, { dialect, columns }: ReadOut): void {
  const at = id.indexOf(':')
  const kind = at === -1 ? id : id.slice(0, at)
  const name = at === -1 ? '' : id.slice(at + 1)
  switch (kind) {
    case 'unit':
      // A file that named none will name none the next time.
      if (dialect.unitFrom === null) draft.unitInFile = false
      if (unitOf(choice) !== null) draft.unit = choice
      return
    case 'decimal-mark':
      draft.decimalMark = choice === ',' ? ',' : '.'
      return
    case 'date-order':
      learnOrder(draft, choice, found ?? '', dialect.timeFormat === 'elapsed-s')
      return
    case 'zone':
      draft.time.zone = choice
      return
    case 'clock-changes':
      if (choice !== 'leave-out') draft.time.zone = choice
      return
    case 'unknown-word':
      draft.words[name] = choice as SourceProfile['words'][string]
      return
    case 'unit-word':
      draft.units[name] = choice
      return
    case 'unknown-channel':
    case 'unfit-unit':
      nameColumn(draft, name, choice === 'leave-out' ? null : choice)
      return
    case 'column':
      draft.columnOrder = columns.map(({ role, channel }) =>
        role === 'time' || role === 'date' ? role : (channel ?? '-'),
      )
      return
    case 'basis':
      draft.basis = choice.startsWith('corrected:')
        ? { kind: 'corrected', gas: choice.slice('corrected:'.length) }
        : { kind: 'nitrogen-equivalent', gas: null }
      return
    case 'reading-of':
      draft.readingColumn = choice as SourceProfile['readingColumn']
      return
    case 'averaging':
      draft.averaging = choice as SourceProfile['averaging']
      return
    case 'floor': {
      const floor = floorOf(choice)
      if (floor !== null && !draft.sentinels.some(({ value }) => value === floor.value))
        draft.sentinels.push(floor)
    }
  }
}

function learnOrder(draft: SourceProfile, choice: string, found: string, isStart: boolean): void {
  const format = choice as NonNullable<SourceProfile['time']['format']>
  if (isStart) {
    if (format === 'dmy' || format === 'mdy' || format === 'ymd') draft.time.startFormat = format
    return
  }
  draft.time.format = format
  // The mark tells a file of another hand: 08.11.2026 and 11/08/2026 hardly come from one logger.
  const mark = /\d([./-])\d/.exec(found)?.[1]
  draft.time.dateMark =
    format.startsWith('serial') || mark === undefined ? null : (mark as SourceProfile['time']['dateMark'])
}

function nameColumn(draft: SourceProfile, inFile: string, channel: string | null): void {
  const own = draft.columns.find((column) => column.inFile === inFile)
  if (own === undefined) draft.columns.push({ inFile, channel, unit: null, quantity: null })
  else own.channel = channel
}

/** What nobody had settled before, and this file showed without a question. */
function fillOpen(draft: SourceProfile, { dialect }: ReadOut): void {
  draft.layout ??= dialect.layout
  draft.separator ??= dialect.separator
  draft.decimalMark ??= dialect.decimalMark
  draft.time.format ??= dialect.timeFormat
  if (draft.unit === null && dialect.unit !== null && dialect.unitFrom !== null) {
    draft.unit = dialect.unit
    draft.unitInFile = true
  }
}
