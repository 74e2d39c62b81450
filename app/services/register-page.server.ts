/** The register's pages: what there is, a list of one kind, and one thing with its dated rows and its history. */
import type { Db } from '../db/client.server.ts'
import { type CountedKind, countRegister, searchRegister } from '../db/queries/register.server.ts'
import { findRegisterRow, listSegmentPlaces } from '../db/queries/register-rows.server.ts'
import { DomainError } from '../domain/errors.ts'
import { LIMIT_KINDS } from '../domain/register.ts'
import { type EditedKind, isEditedKind, KIND_FACTS, type RegisterKind } from '../domain/schemas/register.ts'
import { addressOf, cellText, type RegisterTable } from './register-cells.server.ts'
import { type DatedForm, type DatedPart, readDatedPart } from './register-dated.server.ts'
import { type HistoryLine, readHistory } from './register-history.server.ts'
import { listOfKind } from './register-lists.server.ts'
import { type Values, valuesOf } from './register-values.server.ts'

const HITS_A_KIND = 25

export interface RegisterIndex {
  counts: Record<CountedKind, number>
  /** Kinds of limit. */
  limitKinds: number
  words: string
  hits: { kind: RegisterKind; tag: string; to: string }[]
}

/** Counts of every kind, and where the words occur. */
export async function readRegisterIndex(db: Db, query: URLSearchParams): Promise<RegisterIndex> {
  const words = (query.get('words') ?? '').trim().slice(0, 80)
  const [counts, hits] = await Promise.all([
    countRegister(db),
    words === '' ? [] : searchRegister(db, words, HITS_A_KIND),
  ])
  return {
    counts,
    limitKinds: LIMIT_KINDS.length,
    words,
    hits: hits.map(({ kind, tag, id }) => ({
      kind,
      tag,
      to: kind === 'equipment' ? '/register/equipment' : addressOf(kind, kind === 'channels' ? id : tag),
    })),
  }
}

/** Rows of a table on one page: a list of every channel is a megabyte, which a tablet takes seconds to lay out. */
const ROWS_A_PAGE = 100

export interface RegisterList {
  kind: RegisterKind
  words: string
  /** Rows in all, and of those the ones in which every word occurs. */
  total: number
  found: number
  page: number
  pages: number
  tables: RegisterTable[]
}

/** The list of a kind, narrowed to rows in which every word occurs. Supply sets stand under the circuits they feed. */
export async function readRegisterList(
  db: Db,
  kind: RegisterKind,
  at: Date,
  query: URLSearchParams,
): Promise<RegisterList> {
  const words = (query.get('words') ?? '').trim().slice(0, 80)
  const kinds: RegisterKind[] = kind === 'circuits' ? ['circuits', 'supply-sets'] : [kind]
  const tables = await Promise.all(kinds.map((each) => listOfKind(db, each, at)))
  const wanted = words.toLowerCase().split(/\s+/).filter(Boolean)
  const total = tables.reduce((sum, { rows }) => sum + rows.length, 0)
  const narrowed = tables.map((table) => {
    if (wanted.length === 0) return table
    const rows = table.rows.filter(({ cells }) => {
      const said = cells.map(cellText).join(' ').toLowerCase()
      return wanted.every((word) => said.includes(word))
    })
    return { ...table, rows, empty: `Nothing here holds "${words}".` }
  })
  const found = narrowed.reduce((sum, { rows }) => sum + rows.length, 0)
  const pages = Math.max(1, ...narrowed.map(({ rows }) => Math.ceil(rows.length / ROWS_A_PAGE)))
  const asked = Number(query.get('page') ?? '1')
  const page = Number.isSafeInteger(asked) ? Math.min(Math.max(asked, 1), pages) : 1
  return {
    kind,
    words,
    total,
    found,
    page,
    pages,
    tables: narrowed.map((table) => ({
      ...table,
      rows: table.rows.slice((page - 1) * ROWS_A_PAGE, page * ROWS_A_PAGE),
    })),
  }
}

export interface RegisterDetail extends DatedPart {
  kind: RegisterKind
  tag: string
  /** Values of the form; null for things that have none. */
  values: Values | null
  revision: number
  form: DatedForm | null
  segments: string[]
  history: HistoryLine[]
}

/**
 * One thing: its values, its dated rows and its history.
 *
 * @throws DomainError not-found
 */
export async function readRegisterDetail(
  db: Db,
  kind: RegisterKind,
  key: string,
  at: Date,
): Promise<RegisterDetail> {
  const places = await listSegmentPlaces(db)
  const segments = places.map(({ tag }) => tag)
  if (!isEditedKind(kind)) {
    const part = await readDatedPart(db, kind, key, null, at)
    if (part === null) throw missing(kind, key)
    return {
      kind,
      values: null,
      revision: 0,
      segments,
      history: await readHistory(db, kind, key),
      ...part,
    }
  }
  const row = await findRegisterRow(db, kind, key)
  if (row === null) throw missing(kind, key)
  const [part, history] = await Promise.all([
    readDatedPart(db, kind, row.tag, row, at),
    readHistory(db, kind, row.tag),
  ])
  return {
    kind,
    values: valuesOf(kind, row, places),
    revision: row.revision,
    segments,
    history,
    ...(part ?? { tag: row.tag, facts: [], tables: [], form: null }),
  }
}

function missing(kind: RegisterKind, key: string): DomainError {
  return new DomainError('not-found', `The register has no ${KIND_FACTS[kind].one} ${key}.`)
}

/**
 * What the form that adds a thing needs.
 *
 * @throws DomainError not-found for kinds to which nothing is added by form
 */
export async function readNewThing(
  db: Db,
  kind: RegisterKind,
): Promise<{ kind: EditedKind; segments: string[] }> {
  if (!isEditedKind(kind) || KIND_FACTS[kind].tag === null) {
    throw new DomainError('not-found', `No ${KIND_FACTS[kind].one} is added by form.`)
  }
  return { kind, segments: (await listSegmentPlaces(db)).map(({ tag }) => tag) }
}
