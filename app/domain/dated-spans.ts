/**
 * Rows that hold between two instants (channel maps, fittings, limits). Writing a new stretch over recorded ones never
 * edits them: the touched rows are replaced by what is left of them, so that the former belief stays readable.
 * Every stretch is half open: it holds from `startsAt` and no longer at `endsAt`; an open one has none.
 */
export interface Span {
  startsAt: Date
  endsAt: Date | null
}

/** What is left of a recorded row once something else has been written over part of it. */
export interface Remnant<Row extends Span> extends Span {
  of: Row
}

const FOREVER = Number.POSITIVE_INFINITY

function endOf(span: Span): number {
  return span.endsAt === null ? FOREVER : span.endsAt.getTime()
}

/** Whether two stretches share any time. */
export function overlaps(a: Span, b: Span): boolean {
  return a.startsAt.getTime() < endOf(b) && b.startsAt.getTime() < endOf(a)
}

/** The row that holds at an instant. */
export function spanAt<Row extends Span>(rows: readonly Row[], at: Date): Row | undefined {
  return rows.find((row) => row.startsAt <= at && at.getTime() < endOf(row))
}

/** The first recorded beginning or end after an instant; null when nothing later is recorded. */
export function nextChange(rows: readonly Span[], after: Date): Date | null {
  const later = rows
    .flatMap(({ startsAt, endsAt }) => [startsAt, endsAt])
    .filter((at): at is Date => at !== null && at > after)
    .map((at) => at.getTime())
  return later.length === 0 ? null : new Date(Math.min(...later))
}

/** Rows that a new stretch touches, and what stays of each before and after it. */
export function writeOver<Row extends Span>(
  rows: readonly Row[],
  written: Span,
): { replaced: Row[]; remnants: Remnant<Row>[] } {
  const replaced = rows.filter((row) => overlaps(row, written))
  const remnants: Remnant<Row>[] = []
  for (const row of replaced) {
    if (row.startsAt < written.startsAt) {
      remnants.push({ of: row, startsAt: row.startsAt, endsAt: written.startsAt })
    }
    if (written.endsAt !== null && written.endsAt.getTime() < endOf(row)) {
      remnants.push({ of: row, startsAt: written.endsAt, endsAt: row.endsAt })
    }
  }
  return { replaced, remnants }
}

/** The parts of rows that lie inside a window. */
export function clip<Row extends Span>(rows: readonly Row[], window: Span): Remnant<Row>[] {
  return rows
    .filter((row) => overlaps(row, window))
    .map((row) => {
      const end = Math.min(endOf(row), endOf(window))
      return {
        of: row,
        startsAt: new Date(Math.max(row.startsAt.getTime(), window.startsAt.getTime())),
        endsAt: end === FOREVER ? null : new Date(end),
      }
    })
}
