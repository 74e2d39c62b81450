/** The logbook page: a filter read from the address, one page of entries, and what can be filtered by. */
import type { Db } from '../db/client.server.ts'
import { countEntries, type Entry, findSegmentId, listEntries } from '../db/queries/logbook.server.ts'
import { listSegmentTags } from '../db/queries/segments.server.ts'
import { ENTRY_KINDS, type EntryKind } from '../domain/logbook.ts'

const PAGE_SIZE = 50
/** Nobody has leafed this far; a typed number beyond it must not reach the database. */
const MOST_PAGES = 100_000

export interface LogbookFilter {
  segment: string
  kind: EntryKind | ''
  words: string
  page: number
}

export interface LogbookPageData {
  filter: LogbookFilter
  entries: Entry[]
  total: number
  pageSize: number
  segments: string[]
}

/** Reads the filter leniently (an unknown value is no filter) and finds the page. */
export async function findLogbookPage(db: Db, query: URLSearchParams): Promise<LogbookPageData> {
  const kind = query.get('kind') ?? ''
  const filter: LogbookFilter = {
    segment: query.get('segment') ?? '',
    kind: (ENTRY_KINDS as readonly string[]).includes(kind) ? (kind as EntryKind) : '',
    words: (query.get('words') ?? '').trim().slice(0, 200),
    page: Math.min(MOST_PAGES, Math.max(1, Math.trunc(Number(query.get('page') ?? '1')) || 1)),
  }
  const segmentId = filter.segment === '' ? null : await findSegmentId(db, filter.segment)
  const conditions = {
    ...(segmentId === null ? {} : { segmentId }),
    ...(filter.kind === '' ? {} : { kind: filter.kind }),
    ...(filter.words === '' ? {} : { words: filter.words }),
    limit: PAGE_SIZE,
    offset: (filter.page - 1) * PAGE_SIZE,
  }
  const [entries, total, segments] = await Promise.all([
    listEntries(db, conditions),
    countEntries(db, conditions),
    listSegmentTags(db),
  ])
  return {
    filter: { ...filter, segment: segmentId === null ? '' : filter.segment },
    entries,
    total,
    pageSize: PAGE_SIZE,
    segments,
  }
}

/** Tags an entry can be written about, in order along the tube. */
export async function readSegmentChoices(db: Db): Promise<string[]> {
  return listSegmentTags(db)
}
