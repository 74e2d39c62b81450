import { describe, expect, it } from 'vitest'
import { readSpectrum, type Spectrum } from '#app/physics/fingerprints.ts'
import { DRY_AIR } from '#app/physics/gases.ts'

// Spectra put together from mole fractions of standard dry air and cracking patterns at 70 eV (N2 14/28 = 0.07,
// CO 12/28 = 0.045, H2O 17/18 = 0.23, 16/18 = 0.02; from memory, not verified).
const AIR = {
  28: DRY_AIR.N2,
  14: 0.07 * DRY_AIR.N2,
  32: DRY_AIR.O2,
  16: 0.11 * DRY_AIR.O2,
  40: 1.4 * DRY_AIR.Ar,
  20: 0.15 * DRY_AIR.Ar,
}

function patterns(spectrum: Spectrum, noise = 1e-4): string[] {
  return readSpectrum(spectrum, noise).map((f) => `${f.support} ${f.pattern}`)
}

describe('readSpectrum', () => {
  it('has the ratios of air to lean on', () => {
    expect(DRY_AIR.N2 / DRY_AIR.O2).toBeCloseTo(3.727, 2)
    expect(DRY_AIR.Ar / DRY_AIR.N2).toBeCloseTo(0.0119, 3)
  })

  it('knows an air leak, also where a filament has eaten the oxygen', () => {
    expect(patterns({ ...AIR, 12: 0, 18: 0.05, 2: 0.2 })).toContain('strong air-leak')
    const eaten = patterns({ ...AIR, 32: 0.001, 12: 0.001, 18: 0.05, 2: 0.2 })
    expect(eaten).toContain('some air-leak')
    expect(eaten).not.toContain('strong carbon-monoxide')
  })

  it('does not take carbon monoxide for air', () => {
    const found = patterns({ 28: 1, 12: 0.045, 14: 0.007, 32: 0.0002, 40: 0.0001, 2: 10, 18: 0.1 })
    expect(found).toContain('strong carbon-monoxide')
    expect(found).toContain('strong baked-metal')
    expect(found.join()).not.toMatch(/air-leak/)
  })

  it('knows water before and metal after a bake', () => {
    const water = patterns({ 18: 1, 17: 0.23, 16: 0.02, 2: 0.1, 28: 0.1, 44: 0.02 })
    expect(water).toContain('strong water')
    expect(water.join()).not.toMatch(/baked-metal|methane/)
    const odd = patterns({ 18: 1, 17: 0.6, 2: 0.1 })
    expect(odd).toContain('some water')
  })

  it('tells permeation and a backing line from air', () => {
    const rubber = patterns({ 28: 0.2, 14: 0.014, 32: 0.2, 40: 0.003, 18: 1, 17: 0.23, 4: 0.01, 2: 0.1 })
    expect(rubber).toContain('strong permeation')
    const line = patterns({ 28: 1, 14: 0.07, 32: 0.08, 40: 0.001, 18: 0.3, 2: 0.2 })
    expect(line).toContain('strong backing-line')
    expect(line.join()).not.toMatch(/air-leak/)
    expect(patterns({ ...AIR, 2: 0.1 }).join()).not.toMatch(/backing-line/)
  })

  it('tells methane from the 16 of water and of oxygen', () => {
    expect(patterns({ 16: 1, 15: 0.85, 28: 0.1 })).toContain('some methane')
    expect(patterns(AIR).join()).not.toMatch(/methane/)
  })

  it('knows carbon dioxide and oil', () => {
    expect(patterns({ 44: 1, 28: 0.2, 22: 0.02 })).toContain('strong carbon-dioxide')
    expect(patterns({ 41: 0.8, 43: 1, 55: 0.7, 57: 0.9 })).toContain('strong hydrocarbons')
  })

  it('builds nothing on masses that were not measured or lie in the noise', () => {
    expect(patterns({ 28: 1 })).toEqual([])
    expect(patterns({ 28: 2e-4, 40: 2e-6, 14: 1e-5, 32: 5e-5 }, 1e-4)).toEqual([])
    // Argon at the noise limit must not read as "argon of air".
    expect(patterns({ 28: 0.02, 40: 1e-5, 14: 0.0002 }, 1e-4).join()).not.toMatch(/air-leak/)
    expect(() => readSpectrum({ 28: Number.NaN }, 1e-4)).toThrow(/m\/z 28 is NaN/)
  })

  it('shows the ratios it rests on', () => {
    const [finding] = readSpectrum({ ...AIR, 2: 0.1 }, 1e-5)
    expect(finding!.evidence.map((e) => e.ratio)).toEqual(['40 / 28', '14 / 28', '32 / 28'])
    expect(finding!.evidence[0]!.found).toBeCloseTo(0.0167, 3)
  })
})
