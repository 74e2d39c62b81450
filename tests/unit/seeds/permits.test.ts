import { describe, expect, it } from 'vitest'
import { DIP_ALARMS, HANDOVER_REFUSALS, REVISED_REPORT } from '#seeds/scenario/alarms.ts'
import { BAKES } from '#seeds/scenario/bakes.ts'
import { POWER_DIP } from '#seeds/scenario/events.ts'
import { ELECTRICIAN_LICENCE, PERMITS } from '#seeds/scenario/permits.ts'

const HOUR = 3_600_000
const named = (number: string) => {
  const found = PERMITS.find((one) => one.number === number)
  if (found === undefined) throw new Error(`no ${number}`)
  return found
}

// The counts are those of the demo's own scenario.
describe('permits of the demo', () => {
  it('are 41 with numbers of their own, four of them once or more suspended and one run out while hot', () => {
    expect(PERMITS).toHaveLength(41)
    expect(new Set(PERMITS.map(({ number }) => number)).size).toBe(41)
    expect(PERMITS.filter(({ suspensions }) => suspensions.length > 0)).toHaveLength(4)
    expect(PERMITS.filter(({ expiredLiveAt }) => expiredLiveAt !== undefined)).toHaveLength(1)
  })

  it('hold every bake from its ramp until it was cold', () => {
    for (const { segment, rampAt, offAt, coldAt } of BAKES) {
      const permit = PERMITS.find(
        ({ segments, work, window }) =>
          segments.includes(segment) &&
          work.startsWith('Bake') &&
          window !== null &&
          window.fromAt <= rampAt &&
          rampAt < window.untilAt,
      )
      expect(permit, segment).toBeDefined()
      const last = coldAt ?? offAt ?? rampAt
      expect(permit?.window?.untilAt.getTime(), segment).toBeGreaterThan(last.getTime())
    }
  })

  it('last at most 240 hours as approved, are suspended within, and are not approved by who asked or holds', () => {
    for (const { number, window, extendedFrom, suspensions, approvedBy, requestedBy, holder } of PERMITS) {
      if (window === null) continue
      const approvedUntil = extendedFrom ?? window.untilAt
      expect(approvedUntil.getTime() - window.fromAt.getTime(), number).toBeLessThanOrEqual(240 * HOUR)
      expect(window.untilAt.getTime() - approvedUntil.getTime(), number).toBeLessThanOrEqual(72 * HOUR)
      for (const { fromAt, untilAt } of suspensions) {
        expect(window.fromAt <= fromAt && fromAt < untilAt && untilAt <= window.untilAt, number).toBe(true)
      }
      expect([requestedBy, holder]).not.toContain(approvedBy)
    }
  })

  it('have six points at SG-05, each verified later by another person, under a licence that was valid', () => {
    const points = named('HSP-2026-031').points ?? []
    expect(points.map(({ lock }) => lock)).toEqual(['L-114', 'L-115', 'L-116', 'L-117', 'L-118', 'L-119'])
    for (const { appliedBy, appliedAt, verifiedBy, verifiedAt, witness } of points) {
      expect(verifiedBy).not.toBe(appliedBy)
      expect(verifiedAt > appliedAt).toBe(true)
      expect(witness === undefined).toBe(appliedBy !== ELECTRICIAN_LICENCE.person)
      expect(appliedAt < ELECTRICIAN_LICENCE.endsAt).toBe(true)
    }
    const wanted = named('HSP-2026-032').window
    expect(wanted !== null && ELECTRICIAN_LICENCE.endsAt < wanted.untilAt).toBe(true)
  })
})

describe('alarms, handovers and reports of the demo', () => {
  it('has 46 alarms within six minutes of the power dip', () => {
    expect(DIP_ALARMS).toHaveLength(46)
    const times = DIP_ALARMS.map(({ at }) => at.getTime() - POWER_DIP.at.getTime())
    expect(Math.min(...times)).toBeGreaterThan(0)
    expect(Math.max(...times)).toBeLessThanOrEqual(6 * 60_000)
  })

  it('refused two handovers between two people each, and revised a report after it was signed', () => {
    expect(HANDOVER_REFUSALS).toHaveLength(2)
    for (const { from, to } of HANDOVER_REFUSALS) expect(from).not.toBe(to)
    expect(REVISED_REPORT.revisedAt > REVISED_REPORT.signedAt).toBe(true)
  })
})
