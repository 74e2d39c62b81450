import { describe, expect, it } from 'vitest'
import { airLeakFrom, airOverHelium, heliumResponseSeconds, signalShare } from '#app/physics/helium.ts'

describe('air from helium', () => {
  it('has the two classical factors', () => {
    // A printed table gives 0.374 for molecular and 1.08 for laminar flow.
    expect(Math.abs(airOverHelium('molecular', 293.15) / 0.374 - 1)).toBeLessThan(0.01)
    expect(airOverHelium('laminar', 293.15)).toBeCloseTo(1.08, 2)
  })

  it('turns 2e-9 mbar l/s of helium into air', () => {
    // Computed: 2e-10 Pa m3/s times sqrt(4.002602/28.9647).
    const leak = airLeakFrom({ heliumPaM3S: 2e-10, heliumShare: 1, temperatureK: 293.15 })
    expect(leak.lowPaM3S / 7.434755354432139e-11).toBeCloseTo(1, 5)
    expect(leak.highPaM3S).toBe(leak.lowPaM3S)
    expect(leak.flow).toBe('molecular')
  })

  it('keeps both factors open for middling leaks and only the laminar one for large ones', () => {
    const middling = airLeakFrom({ heliumPaM3S: 1e-6, heliumShare: 1, temperatureK: 293.15 })
    expect(middling.flow).toBeNull()
    expect(middling.highPaM3S / middling.lowPaM3S).toBeCloseTo(1.079 / 0.3717, 2)
    expect(airLeakFrom({ heliumPaM3S: 1e-4, heliumShare: 1, temperatureK: 293.15 }).flow).toBe('laminar')
  })

  it('divides by the helium share of the bag and by the part of the signal that had come up', () => {
    const all = airLeakFrom({ heliumPaM3S: 1e-10, heliumShare: 1, temperatureK: 293.15 })
    const bag = airLeakFrom({ heliumPaM3S: 1e-10, heliumShare: 0.2, temperatureK: 293.15 })
    expect(bag.lowPaM3S / all.lowPaM3S).toBeCloseTo(5, 10)
    const early = airLeakFrom({
      heliumPaM3S: 1e-10,
      heliumShare: 1,
      temperatureK: 293.15,
      sprayedSeconds: 94,
      responseSeconds: 94,
    })
    expect(early.lowPaM3S / all.lowPaM3S).toBeCloseTo(1 / (1 - Math.exp(-1)), 10)
  })

  it('knows how slowly a long tube answers', () => {
    // Arithmetic: 2415 m3 at 1 m3/s; 42 m3 at 0.45 m3/s is 93 s.
    expect(heliumResponseSeconds(2415, 1)).toBe(2415)
    expect(heliumResponseSeconds(42, 0.45)).toBeCloseTo(93.3, 1)
    expect(signalShare(0, 94)).toBe(0)
    expect(signalShare(282, 94)).toBeCloseTo(0.9502, 4)
  })

  it('refuses a reading taken before the signal can have come up', () => {
    const reading = { heliumPaM3S: 1e-10, heliumShare: 1, temperatureK: 293.15, responseSeconds: 2415 }
    expect(() => airLeakFrom({ ...reading, sprayedSeconds: 60 })).toThrow(
      /share of the signal.*expected 0\.05 to 1/,
    )
    expect(() => airLeakFrom({ ...reading, heliumShare: 0 })).toThrow(/heliumShare is 0/)
  })
})
