/** Speeds at the cross, m³/s by gas. */
import type { PumpSpeeds } from '../../app/domain/register.ts'

/** A getter takes no noble gas; what is left for those is the ion pump's. */
export const GETTER_ION = {
  H2: 1.2,
  H2O: 0.5,
  N2: 0.4,
  CO: 0.6,
  CO2: 0.5,
  O2: 0.5,
  Ar: 0.06,
  He: 0.05,
} satisfies PumpSpeeds

/** A cart's speed is set by the elbow between it and the cross more than by its pump. */
export const CART = {
  H2: 0.4,
  H2O: 0.4,
  N2: 0.45,
  CO: 0.45,
  CO2: 0.42,
  Ar: 0.43,
  He: 0.5,
  O2: 0.44,
  CH4: 0.46,
} satisfies PumpSpeeds
