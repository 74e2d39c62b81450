/** Files of the recorder, with the unit in each column's head. */
import type { DemoRecording } from '../scenario/recordings.ts'
import { everyStep } from './calendar.ts'
import { type FileReading, type LoggerFile, reading } from './files.ts'
import { print, trueAt } from './gauge-channels.ts'
import { scatterBySecond, WHITE } from './noise.ts'
import { closedIonCurrentA, ionCurrentA, massOf } from './residual-gas.ts'
import { isoWithOffset, siteDay } from './site-clock.ts'

function valueAt(channel: string, atMs: number): number {
  const mass = massOf(channel)
  if (mass !== null) {
    return channel.startsWith('RG-B')
      ? closedIonCurrentA(mass, atMs, scatterBySecond)
      : ionCurrentA(mass, atMs, scatterBySecond)
  }
  const pa = trueAt(channel, atMs)
  if (typeof pa !== 'number') throw new Error(`${channel} says "${pa}" while it is recorded`)
  return pa * (1 + WHITE * scatterBySecond(channel, atMs))
}

/** The file of a recording. */
export function recorderFile(recording: DemoRecording): LoggerFile {
  const { segment, channels, fromAt, untilAt, stepSeconds, suffix } = recording
  const heads = channels.map((channel) => `${channel} (${massOf(channel) === null ? 'Pa' : 'A'})`)
  const lines = [`# Recorder at ${segment}`, ['time', ...heads].join(',')]
  const readings: FileReading[] = []
  for (const atMs of everyStep(fromAt.getTime(), untilAt.getTime(), stepSeconds * 1000)) {
    const lineNo = lines.length + 1
    const cells = channels.map((channel) => {
      const text = print(valueAt(channel, atMs))
      readings.push(reading(channel, atMs, lineNo, Number(text)))
      return text
    })
    lines.push([isoWithOffset(atMs), ...cells].join(','))
  }
  const bytes = Buffer.from(lines.map((line) => `${line}\n`).join(''), 'latin1')
  return {
    source: 'REC',
    fileName: `REC_${siteDay(fromAt.getTime())}_${segment}${suffix === undefined ? '' : `_${suffix}`}.csv`,
    endsMs: untilAt.getTime(),
    bytes,
    lineCount: lines.length,
    readings,
  }
}
