/** Scales that the drawings share. Pure, so that what a drawing claims can be tested without a browser. */

const LEAST_DECADES = 2

/**
 * Whole powers of ten that enclose the values. Zero, negative and unfinite values have no place on a log axis and are
 * left out; the caller says how many.
 *
 * @param most decades at most; what lies above is beyond the axis, and the drawing says so
 * @returns exponents of the lower and upper edge, at least two decades apart
 */
export function decadesAround(values: readonly number[], most = 9): { low: number; high: number } {
  const logs = values.filter((value) => value > 0 && Number.isFinite(value)).map((value) => Math.log10(value))
  if (logs.length === 0) return { low: -8, high: -6 }
  const low = Math.floor(Math.min(...logs))
  const high = Math.min(low + most, Math.ceil(Math.max(...logs)))
  return { low, high: Math.max(high, low + LEAST_DECADES) }
}

/** Every power of ten from edge to edge. */
export function decadeTicks({ low, high }: { low: number; high: number }): number[] {
  return Array.from({ length: high - low + 1 }, (_, step) => low + step)
}

/** A round step (1, 2, 4 or 5 times a power of ten) that gives about `wanted` ticks over a length. */
export function roundStep(length: number, wanted: number): number {
  const rough = length / wanted
  const power = 10 ** Math.floor(Math.log10(rough))
  const factor = [1, 2, 4, 5, 10].find((candidate) => candidate * power >= rough) ?? 10
  return factor * power
}

interface LineExtent {
  code: string
  lengthM: number
}

/**
 * Places lines one after another on one scale: the main line first, spurs behind it with a gap between, all with the
 * same metres to the unit.
 *
 * @param width width to fill, in units of the drawing
 * @returns place of a chainage on a line; unknown lines have none
 */
export function chainageScale(
  lines: readonly LineExtent[],
  width: number,
  gapShare = 0.022,
): { place: (code: string, chainageM: number) => number | null; perMetre: number } {
  const metres = lines.reduce((sum, line) => sum + line.lengthM, 0)
  const gap = width * gapShare
  const perMetre = metres > 0 ? (width - gap * Math.max(0, lines.length - 1)) / metres : 0
  const starts = new Map<string, number>()
  let at = 0
  for (const line of lines) {
    starts.set(line.code, at)
    at += line.lengthM * perMetre + gap
  }
  return {
    perMetre,
    place: (code, chainageM) => {
      const start = starts.get(code)
      return start === undefined ? null : start + chainageM * perMetre
    },
  }
}
