import { MAX_NOTES, MAX_REJECTED } from './limits.ts'
import { detach } from './text.ts'
import type { LineCounts, LineOutcome, RejectedLine, SkipReason } from './types.ts'

/** What is wrong with a line or one of its cells. */
export interface Fault {
  code: SkipReason
  column: number | null
  found: string
  expected: string
  mend: string
}

/** Gives every line exactly one outcome and keeps what the report shows of those that were turned away. */
export class LineTally {
  readonly rejected: RejectedLine[] = []
  rejectedTotal = 0
  readonly notes: { line: number; text: string }[] = []
  readonly #counts: Record<LineOutcome, number> = {
    header: 0,
    directive: 0,
    note: 0,
    accepted: 0,
    flagged: 0,
    skipped: 0,
  }
  readonly #skippedBy: Partial<Record<SkipReason, number>> = {}

  add(outcome: Exclude<LineOutcome, 'skipped' | 'note'>): void {
    this.#counts[outcome] += 1
  }

  note(line: number, text: string): void {
    this.#counts.note += 1
    if (text.trim() !== '' && this.notes.length < MAX_NOTES) this.notes.push({ line, text: detach(text) })
  }

  /** Counts a skipped line of which nothing more is said (duplicates, footers). */
  skip(reason: SkipReason): void {
    this.#counts.skipped += 1
    this.#skippedBy[reason] = (this.#skippedBy[reason] ?? 0) + 1
  }

  /** Counts a skipped line and keeps it, with its fault, for the list of rejected lines. */
  reject(line: number, text: string, fault: Fault): void {
    this.skip(fault.code)
    this.#keep(line, text, fault, true)
  }

  /** Keeps the fault of one cell; the line's outcome is counted by the caller. */
  rejectCell(line: number, text: string, fault: Fault): void {
    this.#keep(line, text, fault, false)
  }

  #keep(line: number, text: string, fault: Fault, wholeLine: boolean): void {
    this.rejectedTotal += 1
    if (this.rejected.length >= MAX_REJECTED) return
    this.rejected.push({ ...fault, found: detach(fault.found), line, text: detach(text), wholeLine })
  }

  total(): number {
    return Object.values(this.#counts).reduce((sum, count) => sum + count, 0)
  }

  counts(counted: number): LineCounts {
    return { ...this.#counts, total: this.total(), counted, skippedBy: { ...this.#skippedBy } }
  }
}
