import { describe, expect, it } from 'vitest'
import { type FedSource, feedInstants, feedReadings } from '#seeds/feeder/feed.ts'

const siteMs = (text: string) => Date.parse(`2026-11-${text}:00+01:00`)
const STEP_MS = 300_000

function fedValue(source: FedSource, channel: string, atMs: number): number | string | undefined {
  return feedReadings(source, atMs).find((one) => one.channel === channel)?.value
}

function temperatures(segment: string, atMs: number): number[] {
  return feedReadings('NL-T', atMs)
    .filter(({ channel }) => channel.startsWith(`TH-${segment}-`))
    .map(({ value }) => Number(value))
}

describe('instants', () => {
  it('are five minutes apart, go on after the last, and begin where the night ended', () => {
    expect(feedInstants(siteMs('09T07:58'), siteMs('09T08:10'), 99)).toEqual([
      siteMs('09T08:00'),
      siteMs('09T08:05'),
      siteMs('09T08:10'),
    ])
    expect(feedInstants(siteMs('09T08:00'), siteMs('09T08:04'), 99)).toEqual([])
    expect(feedInstants(0, siteMs('09T08:00'), 99)[0]).toBe(siteMs('09T06:05'))
    expect(feedInstants(0, siteMs('09T08:00'), 99)).toHaveLength(24)
  })

  it('are bounded, and end with the last permit however far the clock is moved', () => {
    expect(feedInstants(siteMs('09T08:00'), siteMs('20T08:00'), 72)).toHaveLength(72)
    const all = feedInstants(siteMs('09T08:00'), siteMs('30T08:00'), 100_000)
    expect(all.at(-1)).toBe(siteMs('13T18:00'))
    expect(feedInstants(siteMs('13T18:00'), siteMs('30T08:00'), 72)).toEqual([])
  })
})

describe('SG-05 in its soak', () => {
  it('is near 150 °C but for TH-05-09, which is low', () => {
    const all = temperatures('05', siteMs('09T08:00'))
    expect(all).toHaveLength(12)
    const low = fedValue('NL-T', 'TH-05-09', siteMs('09T08:00'))
    expect(low).toBeGreaterThan(126)
    expect(low).toBeLessThan(130)
    for (const value of all.filter((one) => one !== low)) expect(Math.abs(value - 150)).toBeLessThan(4)
  })

  it('is heated with what the soak of a tube of 150 m takes', () => {
    // 1083 A and 23.4 V by app/physics for 0.60 m, 3 mm and 100 mm of insulation; meters with a ripple of 0.1 %.
    expect(fedValue('NL-P', 'HX-1-I', siteMs('09T08:00'))).toBeGreaterThan(1083 * 0.99)
    expect(fedValue('NL-P', 'HX-1-I', siteMs('09T08:00'))).toBeLessThan(1083 * 1.01)
    expect(Math.abs(Number(fedValue('NL-P', 'HX-1-U', siteMs('09T08:00'))) - 23.4)).toBeLessThan(0.3)
  })

  it('cools without a jump once the soak has ended, with its supply off', () => {
    const before = temperatures('05', siteMs('12T09:10'))
    const later = temperatures('05', siteMs('12T09:15'))
    for (const [index, value] of later.entries())
      expect(Math.abs(value - (before[index] ?? 0))).toBeLessThan(3)
    expect(fedValue('NL-P', 'HX-1-I', siteMs('12T09:15'))).toBe('OFF')
    const end = temperatures('05', siteMs('13T18:00'))
    for (const value of end) expect(value).toBeLessThan(30)
  })
})

describe('SG-08 as it cools', () => {
  it('stands at 62 °C on the morning, its flange above, and falls from row to row within noise', () => {
    const morning = temperatures('08', siteMs('09T08:00'))
    expect(Math.abs((morning[5] ?? 0) - 62)).toBeLessThan(2)
    expect(Math.max(...morning)).toBe(fedValue('NL-T', 'TH-08-12', siteMs('09T08:00')))
    const rows = feedInstants(siteMs('09T08:00'), siteMs('09T20:00'), 999).map(
      (ms) => temperatures('08', ms)[5] ?? 0,
    )
    for (const [index, value] of rows.entries()) expect(value - (rows[index - 1] ?? 99)).toBeLessThan(0.5)
    expect(rows.at(-1)).toBeLessThan(30)
    expect(fedValue('NL-P', 'HX-2-U', siteMs('09T08:00'))).toBe('OFF')
  })

  it('is posted no longer than its permit', () => {
    expect(temperatures('08', siteMs('10T18:00'))).toHaveLength(12)
    expect(temperatures('08', siteMs('10T18:00') + STEP_MS)).toEqual([])
    expect(temperatures('05', siteMs('10T18:00') + STEP_MS)).toHaveLength(12)
    expect(feedReadings('NL-P', siteMs('13T18:00') + STEP_MS)).toEqual([])
  })
})

it('says the same of an instant at every run', () => {
  expect(feedReadings('NL-T', siteMs('09T12:00'))).toEqual(feedReadings('NL-T', siteMs('09T12:00')))
  expect(feedReadings('NL-T', siteMs('09T08:05'))[0]).toEqual({
    channel: 'TH-08-01',
    at: '2026-11-09T08:05:00+01:00',
    value: expect.any(Number),
    unit: '°C',
  })
})
