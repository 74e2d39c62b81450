/** The record of one thing of the register, as lines for its page: who, when, since when it holds, from what to what, why. */
import type { DbOrTx } from '../db/client.server.ts'
import { KIND_FACTS, type KindFacts, type RegisterKind } from '../domain/schemas/register.ts'
import { SEGMENT_STATES, type SegmentState } from '../domain/segment-states.ts'
import { listRecord } from './record.server.ts'
import { type Cell, figure, instant, NONE, text } from './register-cells.server.ts'

const LINES = 100
const ISO = /^\d{4}-\d{2}-\d{2}T\d{2}:\d{2}:\d{2}\.\d{3}Z$/

export interface HistoryLine {
  id: number
  at: Date
  person: string | null
  act: string
  effectiveAt: Date | null
  reason: string
  changes: { name: string; before: Cell; after: Cell }[]
}

/** The newest hundred lines of the record of one thing. */
export async function readHistory(db: DbOrTx, kind: RegisterKind, subjectId: string): Promise<HistoryLine[]> {
  const facts = KIND_FACTS[kind]
  const lines = await listRecord(db, { subjectKind: facts.subject, subjectId, limit: LINES })
  return lines.map(({ id, at, person, act, effectiveAt, reason, before, after }) => ({
    id,
    at,
    person,
    act,
    effectiveAt,
    reason,
    changes: changesOf(facts, before, after),
  }))
}

function changesOf(facts: KindFacts, before: unknown, after: unknown): HistoryLine['changes'] {
  if (Array.isArray(before) || Array.isArray(after)) return spansOf(before, after)
  const [was, is] = [plain(before), plain(after)]
  const names = [...new Set([...Object.keys(was), ...Object.keys(is)])]
  return (
    names
      // A name that stands on one side only and says nothing is no change.
      .filter((name) => !(isEmpty(was[name]) && isEmpty(is[name])))
      .map((name) => ({
        name: labelOf(facts, name),
        before: cellOf(facts, name, was[name]),
        after: cellOf(facts, name, is[name]),
      }))
  )
}

function plain(value: unknown): Record<string, unknown> {
  return typeof value === 'object' && value !== null && !Array.isArray(value)
    ? (value as Record<string, unknown>)
    : {}
}

function isEmpty(value: unknown): boolean {
  return value === undefined || value === null || value === ''
}

const OTHER_LABELS: Record<string, string> = {
  segment: 'Segment',
  offsetM: 'Metres from its start',
  value: 'Value',
  state: 'State',
  unit: 'Unit',
}

function labelOf(facts: KindFacts, name: string): string {
  return facts.fields.find((field) => field.name === name)?.label ?? OTHER_LABELS[name] ?? name
}

function cellOf(facts: KindFacts, name: string, value: unknown): Cell {
  if (isEmpty(value)) return NONE
  if (typeof value === 'boolean') return text(value ? 'yes' : 'no')
  const field = facts.fields.find((candidate) => candidate.name === name)
  if (typeof value === 'number') return figure(value, field?.unit ?? (name === 'offsetM' ? 'm' : ''))
  const words = String(value)
  if (ISO.test(words)) return instant(new Date(words))
  if (name === 'state' && words in SEGMENT_STATES) return text(SEGMENT_STATES[words as SegmentState].label)
  return text(field?.options.find((option) => option.value === words)?.label ?? words)
}

/** Dated stretches before and after: one line each, "channel to position" or "instrument with factor". */
function spansOf(before: unknown, after: unknown): HistoryLine['changes'] {
  const changes: HistoryLine['changes'] = []
  for (const [side, spans] of [
    ['before', before],
    ['after', after],
  ] as const) {
    for (const span of Array.isArray(spans) ? spans.map(plain) : []) {
      const cell = text(spanText(span))
      const name = side === 'before' ? 'Was' : 'Is'
      changes.push({ name, before: side === 'before' ? cell : NONE, after: side === 'after' ? cell : NONE })
    }
  }
  return changes
}

function spanText(span: Record<string, unknown>): string {
  if ('atStart' in span) return `clock ${String(span.atStart)} at the start, ${String(span.atEnd)} at the end`
  if ('instrument' in span) {
    return span.instrument === null
      ? 'no instrument'
      : `${String(span.instrument)}, factor ${String(span.factor)}`
  }
  return `${String(span.channel)} at ${span.position === null ? 'no position' : String(span.position)}`
}
