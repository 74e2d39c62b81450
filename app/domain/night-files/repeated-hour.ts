/**
 * The hour that the autumn clock change repeats. Its rows are held until the hour is over, since only the order of
 * all of them tells which pass a row belongs to.
 */

export interface HeldRow {
  /** Clock the row is ordered by: the channel of a long file, '' for a whole wide row. */
  track: string
  wallMs: number
  first: number
  second: number
}

export interface Neighbours {
  /** Instant of the last row before the hour, null when the file starts inside it. */
  beforeMs: number | null
  /** Instant of the first row after the hour, null when the file ends inside it. */
  afterMs: number | null
  /** Usual step between rows, null when not known. */
  periodMs: number | null
}

/** Instant per row, NaN when the passes cannot be told apart. */
export function resolveRepeatedHour(rows: readonly HeldRow[], neighbours: Neighbours): Float64Array {
  const instants = new Float64Array(rows.length)
  const tracks = new Map<string, number[]>()
  rows.forEach((row, i) => {
    const own = tracks.get(row.track)
    if (own === undefined) tracks.set(row.track, [i])
    else own.push(i)
  })
  for (const own of tracks.values()) resolveTrack(rows, own, neighbours, instants)
  return instants
}

function resolveTrack(
  rows: readonly HeldRow[],
  own: readonly number[],
  neighbours: Neighbours,
  instants: Float64Array,
): void {
  const row = (k: number) => rows[own[k] as number] as HeldRow
  let backSteps = 0
  let turn = -1
  let repeats = 0
  for (let k = 1; k < own.length; k++) {
    const step = row(k).wallMs - row(k - 1).wallMs
    if (step < 0) {
      backSteps += 1
      turn = k
    } else if (step === 0) repeats += 1
  }
  if (backSteps === 1 && isClockChange(row(turn - 1), row(turn), neighbours.periodMs)) {
    for (let k = 0; k < own.length; k++) {
      const held = row(k)
      instants[own[k] as number] = k < turn ? held.first : held.second
    }
    return
  }
  let choice: 'first' | 'second' | null = null
  if (backSteps === 0 && repeats === 0) choice = onePass(row(0), row(own.length - 1), neighbours)
  for (let k = 0; k < own.length; k++) {
    const held = row(k)
    instants[own[k] as number] = choice === null ? Number.NaN : choice === 'first' ? held.first : held.second
  }
}

/** Whether one step back is the clock change: the second pass runs on from the first, or the step is a large one. */
function isClockChange(before: HeldRow, after: HeldRow, periodMs: number | null): boolean {
  const stepOn = after.second - before.first
  if (periodMs !== null && stepOn > 0 && stepOn <= 3 * periodMs) return true
  return before.wallMs - after.wallMs >= 10 * 60_000
}

/** A single pass belongs to the side that it runs on from without a break; to neither when both or none fit. */
function onePass(firstRow: HeldRow, lastRow: HeldRow, neighbours: Neighbours): 'first' | 'second' | null {
  const { beforeMs, afterMs, periodMs } = neighbours
  if (periodMs === null) return null
  const reach = 3 * periodMs
  const joinsBefore = beforeMs !== null && firstRow.first - beforeMs <= reach && firstRow.first > beforeMs
  const joinsAfter = afterMs !== null && afterMs - lastRow.second <= reach && afterMs > lastRow.second
  if (joinsBefore === joinsAfter) return null
  return joinsBefore ? 'first' : 'second'
}
