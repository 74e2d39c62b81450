/** Files whose numbers hold a decimal comma and whose fields are cut at commas as well, without quotes. */

const WHOLE = /^\s*[<>]?=?\s*[+-]?\d+$/
const DECIMALS = /^\d+(?:[eE][+-]?\d+)?\s*$/

/** Fields joined to so many cells; two of the ways where there are several; null where there is none. */
export type Joined =
  | { kind: 'one'; fields: string[] }
  | { kind: 'several'; ways: [string[], string[]] }
  | null

/** Joins neighbouring fields that can be the two sides of a decimal comma until `count` cells are left. */
export function joinDecimalCommas(fields: readonly string[], count: number): Joined {
  const surplus = fields.length - count
  if (surplus < 0) return null
  const ways: string[][] = []
  // From the left: every cell is one field, or two that a comma may have parted.
  const walk = (at: number, left: number, cells: string[]) => {
    if (ways.length > 1) return
    if (at === fields.length) {
      if (left === 0) ways.push(cells)
      return
    }
    const cell = fields[at] as string
    const next = fields[at + 1]
    // Fewer fields than surplus ones cannot be joined away any more.
    if (left > 0 && next !== undefined && WHOLE.test(cell) && DECIMALS.test(next))
      walk(at + 2, left - 1, [...cells, `${cell},${next}`])
    if (fields.length - at - 1 >= 2 * left) walk(at + 1, left, [...cells, cell])
  }
  walk(0, surplus, [])
  const [first, second] = ways
  if (first === undefined) return null
  return second === undefined ? { kind: 'one', fields: first } : { kind: 'several', ways: [first, second] }
}

/** Whether most rows of a file cut at commas have more fields than its header, for the sake of decimal commas. */
export function hasDecimalCommas(rows: readonly { fields: string[] }[], count: number): boolean {
  const longer = rows.filter(
    ({ fields }) => fields.length > count && joinDecimalCommas(fields, count) !== null,
  )
  return longer.length > 0.5 * rows.length
}

/** The cells by which two ways of joining a row differ, for a message. */
export function twoWays([first, second]: [string[], string[]]): string {
  const from = first.findIndex((cell, i) => cell !== second[i])
  let to = first.length
  while (to > from + 1 && first[to - 1] === second[to - 1]) to -= 1
  const shown = (cells: string[]) => `“${cells.slice(from, to).join(' and ')}”`
  return `fields that read as ${shown(first)} or as ${shown(second)}`
}
