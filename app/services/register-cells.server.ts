/** What stands in the cells of the register's tables: plain values with their meaning, laid out by the page. */
import { KIND_FACTS, type RegisterKind } from '../domain/schemas/register.ts'

/**
 * A cell: text, a figure with its unit, a pressure, an instant, a link to another page, or nothing known.
 */
export type Cell =
  | { kind: 'text'; text: string }
  | { kind: 'number'; value: number; unit: string }
  | { kind: 'pressure'; pa: number }
  | { kind: 'instant'; at: Date }
  | { kind: 'link'; to: string; text: string }
  | { kind: 'none' }

export interface RegisterTable {
  title: string
  columns: { name: string; right: boolean }[]
  rows: { key: string; cells: Cell[] /** A former belief, shown struck through. */; replaced: boolean }[]
  empty: string
}

export const NONE: Cell = { kind: 'none' }

export function text(value: string | null | undefined): Cell {
  return value === null || value === undefined || value === '' ? NONE : { kind: 'text', text: value }
}

export function figure(value: unknown, unit = ''): Cell {
  return typeof value === 'number' ? { kind: 'number', value, unit } : NONE
}

export function pressure(value: unknown): Cell {
  return typeof value === 'number' ? { kind: 'pressure', pa: value } : NONE
}

export function instant(at: unknown): Cell {
  return at instanceof Date ? { kind: 'instant', at } : NONE
}

/** Address of a thing's page in the register. */
export function addressOf(kind: RegisterKind, key: string | number): string {
  return `/register/${kind}/${encodeURIComponent(String(key))}`
}

/** Link to a thing's page in the register; nothing where there is no such thing. */
export function link(
  kind: RegisterKind,
  tag: string | null | undefined,
  key: string | number | null | undefined = tag,
): Cell {
  if (tag === null || tag === undefined || tag === '' || key === null || key === undefined) return NONE
  return { kind: 'link', to: addressOf(kind, key), text: tag }
}

/** Columns of a table; a name that ends in ">" stands at the right edge. */
export function columns(...names: string[]): RegisterTable['columns'] {
  return names.map((name) => ({ name: name.replace(/>$/, ''), right: name.endsWith('>') }))
}

/** The label that a choice is shown by. */
export function choiceLabel(kind: RegisterKind, field: string, value: unknown): Cell {
  const options = KIND_FACTS[kind].fields.find(({ name }) => name === field)?.options ?? []
  return text(options.find((option) => option.value === value)?.label ?? String(value ?? ''))
}

/** What a cell says, for finding words in a table. */
export function cellText(cell: Cell): string {
  if (cell.kind === 'text' || cell.kind === 'link') return cell.text
  return cell.kind === 'number' ? `${cell.value} ${cell.unit}` : ''
}
