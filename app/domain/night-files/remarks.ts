import type { FileBody } from './body.ts'
import { GAP_PERIODS } from './limits.ts'
import type { NulScanner } from './lines.ts'
import type { ReadingSink } from './sink.ts'
import type { ChannelSummary, ColumnReadOut, Remark, RemarkKind } from './types.ts'

/** A clock set right steps back once or twice; so many steps look like files laid one behind the other (our choice). */
const MANY_BACK_STEPS = 5

function remark(kind: RemarkKind, count: number, text: string, extra: Partial<Remark> = {}): Remark {
  return { kind, text, line: null, channel: null, atMs: null, count, ...extra }
}

export interface FileFacts {
  encoding: string
  badBytes: boolean
  nul: NulScanner
  bytes: number
  statedBytes: number | null
}

/** What a person should look at, in sentences: from the rows, the channels and the bytes. */
export function collectRemarks(body: FileBody | null, sink: ReadingSink, facts: FileFacts): Remark[] {
  const remarks: Remark[] = []
  if (facts.statedBytes !== null && facts.statedBytes !== facts.bytes)
    remarks.push(
      remark(
        'short-file',
        1,
        `The file was announced with ${facts.statedBytes} bytes and ${facts.bytes} arrived. Send it again if it was cut.`,
      ),
    )
  if (facts.encoding !== 'utf-8')
    remarks.push(remark('encoding', 1, `The text is written in ${facts.encoding} and was read as such.`))
  if (facts.badBytes)
    remarks.push(
      remark('damaged-bytes', 1, 'Some bytes are no text; they stand as � in the lines concerned.'),
    )
  const range = facts.nul.ranges[0]
  if (range !== undefined && !facts.encoding.startsWith('utf-16'))
    remarks.push(
      remark(
        'damaged-bytes',
        facts.nul.ranges.length,
        `Bytes ${range.from} to ${range.to} are NUL, as a disk fault leaves them. The lines concerned are left out.`,
      ),
    )
  if (body === null) return remarks
  remarks.push(...body.remarks)
  const { doubts } = body.rows
  const many = (count: number, one: string, several: string) => (count === 1 ? one : `${count} ${several}`)
  if (doubts.conflict > 0)
    remarks.push(
      remark(
        'conflicts',
        doubts.conflict,
        `${many(doubts.conflict, 'One reading differs', 'readings differ')} from another of the same channel and instant. Both are kept and marked.`,
      ),
    )
  if (doubts.future > 0)
    remarks.push(
      remark(
        'future-times',
        doubts.future,
        `${many(doubts.future, 'One reading lies', 'readings lie')} in the future and will be stored as suspect. Check the clock of the logger.`,
      ),
    )
  if (doubts.zero + doubts.negative > 0)
    remarks.push(
      remark(
        'zero-or-negative',
        doubts.zero + doubts.negative,
        `${many(doubts.zero + doubts.negative, 'One pressure is', 'pressures are')} zero or negative and will be stored as suspect.`,
      ),
    )
  if (doubts.ceiling > 0)
    remarks.push(
      remark(
        'outside-ceiling',
        doubts.ceiling,
        `${many(doubts.ceiling, 'One value lies', 'values lie')} outside what is plausible and will be stored as suspect.`,
      ),
    )
  if (doubts['open-sensor'] > 0)
    remarks.push(
      remark(
        'open-sensor',
        doubts['open-sensor'],
        `${many(doubts['open-sensor'], 'One temperature is', 'temperatures are')} at full scale, as an open sensor reads, and will be stored as fault.`,
      ),
    )
  if (doubts.dates > 0)
    remarks.push(
      remark(
        'outside-dates',
        doubts.dates,
        `${many(doubts.dates, 'One reading lies', 'readings lie')} outside the dates of the channel in the register and will be stored as suspect.`,
      ),
    )
  if (doubts.bounds > 0)
    remarks.push(
      remark(
        'outside-bounds',
        doubts.bounds,
        `${many(doubts.bounds, 'One reading lies', 'readings lie')} outside the lowest and highest value of the row it stands in. Are the columns what they are called?`,
      ),
    )
  if (doubts.spaced > 0)
    remarks.push(
      remark(
        'spaced-exponent',
        doubts.spaced,
        `${many(doubts.spaced, 'One number has', 'numbers have')} blanks inside and was read without them.`,
      ),
    )
  if (body.backSteps > 0)
    remarks.push(
      remark(
        'disorder',
        body.backSteps,
        `The time steps back ${body.backSteps === 1 ? 'once' : `${body.backSteps} times`} from one row to the next. Readings are ordered by their time.${body.backSteps >= MANY_BACK_STEPS ? ' Were several files put together into one?' : ''}`,
      ),
    )
  remarks.push(...statisticRemarks(body.block?.columns ?? []))
  const leftOut = (body.block?.columns ?? [])
    .filter(({ role, statistic }) => role === 'left-out' && statistic === undefined)
    .map(({ inFile }) => inFile)
  if (leftOut.length > 0)
    remarks.push(
      remark(
        'left-out-columns',
        leftOut.length,
        `Left out: ${leftOut.slice(0, 8).join(', ')}${leftOut.length > 8 ? ' …' : ''}.`,
      ),
    )
  const change = body.rows.unitChange
  if (change !== null)
    remarks.push(
      remark(
        'unit-change',
        1,
        `The unit changes from ${change.from} to ${change.to} at line ${change.line}. Each row is read in its own.`,
        { line: change.line },
      ),
    )
  for (const { channel, count, line } of sink.meterRestarts())
    remarks.push(
      remark(
        'meter-restart',
        count,
        `${channel} counts less than before: the meter ran over its last figure, or was exchanged. Its figures are kept as they stand.`,
        { channel, line },
      ),
    )
  for (const { channel, count, line, text } of sink.stuck())
    remarks.push(
      remark('stuck', count, `${channel} shows ${text} in ${count} rows one after the other. Is it stuck?`, {
        channel,
        line,
      }),
    )
  remarks.push(...stoppedChannels(sink))
  return remarks
}

/** Which columns of a stretch of time count as readings, and which only bound them. */
function statisticRemarks(columns: readonly ColumnReadOut[]): Remark[] {
  const some = (list: readonly ColumnReadOut[]) =>
    `${list
      .slice(0, 6)
      .map(({ inFile }) => inFile)
      .join(', ')}${list.length > 6 ? ' …' : ''}`
  const statistics = columns.filter(({ statistic }) => statistic !== undefined)
  const read = statistics.filter(({ channel }) => channel !== null)
  const kept = statistics.filter(({ channel }) => channel === null)
  const remarks: Remark[] = []
  if (read.length > 0)
    remarks.push(
      remark(
        'averaged',
        read.length,
        `Taken as the reading: ${some(read)}. A row stands for a stretch of time, not for a moment.`,
      ),
    )
  if (kept.length > 0)
    remarks.push(
      remark(
        'averaged',
        kept.length,
        `No readings of their own: ${some(kept)}. They stay in the original file, and readings are held against their lowest and highest values.`,
      ),
    )
  return remarks
}

/** Channels that fall silent before the end of the file while others go on. */
function stoppedChannels(sink: ReadingSink): Remark[] {
  const { periodMs, lastMs } = sink
  if (periodMs === null || lastMs === null) return []
  return sink.summaries().flatMap((channel: ChannelSummary) => {
    if (channel.lastMs === null || lastMs - channel.lastMs <= GAP_PERIODS * periodMs) return []
    return [
      remark('channel-stops', 1, `${channel.name} stops before the end of the file while others go on.`, {
        channel: channel.name,
        atMs: channel.lastMs,
      }),
    ]
  })
}
