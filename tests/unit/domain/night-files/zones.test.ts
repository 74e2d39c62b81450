import { TZDate } from '@date-fns/tz'
import { describe, expect, it } from 'vitest'
import { ZoneClock } from '#app/domain/night-files/zones.ts'

const MINUTE = 60_000

/** Wall time of an instant by the library, as if it were UTC. */
function wallOf(zone: string, atMs: number): number {
  const local = new TZDate(atMs, zone)
  return Date.UTC(
    local.getFullYear(),
    local.getMonth(),
    local.getDate(),
    local.getHours(),
    local.getMinutes(),
    local.getSeconds(),
  )
}

// Both days of 2026 on which each zone changes its clocks (the dates from memory; the library has the rules).
const DAYS: [string, string, number][] = [
  ['Europe/Vienna', '2026-03-29', 0],
  ['Europe/Vienna', '2026-10-25', 2],
  ['America/New_York', '2026-03-08', 0],
  ['America/New_York', '2026-11-01', 2],
  ['Australia/Lord_Howe', '2026-10-04', 0],
  ['Australia/Lord_Howe', '2026-04-05', 2],
]

describe('wall time to instants', () => {
  it.each(DAYS)('%s on %s agrees with the library in both directions', (zone, day, odd) => {
    const clock = new ZoneClock(zone)
    const noon = Date.parse(`${day}T12:00:00Z`)
    // All instants of the day and its neighbours, by the wall time that the library gives them.
    const byWall = new Map<number, number[]>()
    for (let atMs = noon - 48 * 60 * MINUTE; atMs <= noon + 48 * 60 * MINUTE; atMs += 5 * MINUTE) {
      const wallMs = wallOf(zone, atMs)
      byWall.set(wallMs, [...(byWall.get(wallMs) ?? []), atMs])
    }
    let odds = 0
    for (let wallMs = noon - 24 * 60 * MINUTE; wallMs <= noon + 24 * 60 * MINUTE; wallMs += 5 * MINUTE) {
      const expected = byWall.get(wallMs) ?? []
      expect(clock.instants(wallMs), new Date(wallMs).toISOString()).toEqual(expected)
      if (expected.length === odd) odds += 1
    }
    // Lord Howe Island moves its clocks by half an hour, the others by one.
    expect(odds).toBe(zone === 'Australia/Lord_Howe' ? 6 : 12)
  })
})
