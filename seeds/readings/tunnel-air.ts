/** Temperature of the tunnel's air, which the cold tube follows: a slow year and a small day. */
const DAY_MS = 86_400_000
const YEAR_MS = 365.25 * DAY_MS
/** Warmest at the beginning of August, half a degree either way; in the afternoon, a fifth of a degree. */
const WARMEST_DAY_MS = Date.UTC(2026, 7, 1)
const YEAR_SWING_K = 0.5
const DAY_SWING_K = 0.2
const WARMEST_HOUR_MS = 15 * 3_600_000
const MEAN_C = 18

/** Air of the tunnel at an instant, °C. */
export function tunnelAirC(atMs: number): number {
  const year = YEAR_SWING_K * Math.cos((2 * Math.PI * (atMs - WARMEST_DAY_MS)) / YEAR_MS)
  const day = DAY_SWING_K * Math.cos((2 * Math.PI * (atMs - WARMEST_HOUR_MS)) / DAY_MS)
  return MEAN_C + year + day
}

/** Over RT² at 18 °C, the activation energy of hydrogen from steel (57 kJ/mol in app/physics) is 8 % a kelvin. */
const SHARE_PER_K = 0.081

/** Outgassing of the cold tube at an instant against that at another, as a factor. */
export function outgassingSwing(atMs: number, referenceMs: number): number {
  return Math.exp(SHARE_PER_K * (tunnelAirC(atMs) - tunnelAirC(referenceMs)))
}
