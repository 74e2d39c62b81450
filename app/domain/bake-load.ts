/**
 * What heating a segment asks of supplies, cables and crews: power, current, voltage, hours of cooling. Temperatures in
 * °C, rates in K/h, power in W. The tube is its own heater; blankets warm the boxes and the cross.
 */
import { steelResistivity } from '../physics/steel.ts'
import { coolSeconds, type HeatedTube, holdPower, rampPower } from '../physics/thermal.ts'
import { celsiusToKelvin } from '../physics/units.ts'
import type { Feeder } from './register.ts'

/** Facts of the register that its heating depends on. Lengths in metres, travel in millimetres. */
export interface BakedSegment {
  tag: string
  startM: number
  endM: number
  innerDiameterM: number
  wallM: number
  insulationM: number
  insulationWPerMK: number
  resistance20Ohm: number
  bellowsCount: number
  bellowsTravelMm: number
  bellowsRatedMm: number
  /** Power of the blankets of the segment, W. */
  blanketW: number
  feeder: Feeder | null
}

/** Supports and ends lose about a third again of what the insulation does (common practice, no source). */
const SUPPORT_SHARE = 1.3
const REFERENCE_K = 293.15

/** The tube as the thermal model wants it: conduction through the insulation, supports counted in. */
export function heatedTube(
  segment: Pick<BakedSegment, 'innerDiameterM' | 'wallM' | 'insulationM' | 'insulationWPerMK'>,
  ambientC: number,
): HeatedTube {
  const { innerDiameterM, wallM, insulationM, insulationWPerMK } = segment
  const perMetreK =
    (2 * Math.PI * insulationWPerMK) / Math.log((innerDiameterM / 2 + insulationM) / (innerDiameterM / 2))
  return {
    diameterM: innerDiameterM,
    wallM,
    lossWM2K: (SUPPORT_SHARE * perMetreK) / (Math.PI * innerDiameterM),
    ambientK: celsiusToKelvin(ambientC),
  }
}

/** Power at a temperature while it climbs `rateKH`; the blankets are counted in full as long as there is heat. */
export function powerW(
  segment: BakedSegment,
  ambientC: number,
  celsius: number,
  rateKH: number,
): { tubeW: number; blanketW: number; totalW: number } {
  const perMetre = rampPower(heatedTube(segment, ambientC), celsiusToKelvin(celsius), rateKH / 3600)
  const tubeW = Math.max(0, perMetre * (segment.endM - segment.startM))
  const blanketW = tubeW > 0 ? segment.blanketW : 0
  return { tubeW, blanketW, totalW: tubeW + blanketW }
}

/** End-to-end resistance at a temperature, Ω: the register's value at 20 °C carried on by the law of the steel. */
function resistanceOhm(segment: Pick<BakedSegment, 'resistance20Ohm'>, celsius: number): number {
  return (
    (segment.resistance20Ohm * steelResistivity(celsiusToKelvin(celsius))) / steelResistivity(REFERENCE_K)
  )
}

/**
 * Current through one segment or a pair in series, and the voltage across all of it. In a pair the one that needs more
 * sets the current; cables are left out.
 */
export function ampsAndVolts(
  segments: readonly BakedSegment[],
  ambientC: number,
  celsius: number,
  rateKH: number,
): { amps: number; volts: number } {
  let amps = 0
  let ohms = 0
  for (const segment of segments) {
    const own = resistanceOhm(segment, celsius)
    amps = Math.max(amps, Math.sqrt(powerW(segment, ambientC, celsius, rateKH).tubeW / own))
    ohms += own
  }
  return { amps, volts: amps * ohms }
}

/** A heating programme; `downKH` null lets the tube cool by itself. */
interface HeatProgramme {
  celsius: number
  upKH: number
  holdHours: number
  downKH: number | null
}

/** Steps an hour is looked at in: the power of the hour is the highest of them, so that the peak is not averaged away. */
const LOOKS_AN_HOUR = 4

/** Highest power of each hour from the start of heating until the heaters go off, W, of all segments together. */
export function powerByHour(
  segments: readonly BakedSegment[],
  ambientC: number,
  programme: HeatProgramme,
): number[] {
  const { celsius, upKH, holdHours, downKH } = programme
  const rampHours = (celsius - ambientC) / upKH
  const downHours = downKH === null ? 0 : (celsius - ambientC) / downKH
  const total = rampHours + holdHours + downHours
  const powerAt = (hour: number): number =>
    segments.reduce((sum, segment) => {
      if (hour < rampHours) return sum + powerW(segment, ambientC, ambientC + hour * upKH, upKH).totalW
      if (hour <= rampHours + holdHours) return sum + powerW(segment, ambientC, celsius, 0).totalW
      if (downKH === null || hour > total) return sum
      return (
        sum + powerW(segment, ambientC, celsius - (hour - rampHours - holdHours) * downKH, -downKH).totalW
      )
    }, 0)
  const peak = segments.reduce((sum, segment) => sum + powerW(segment, ambientC, celsius, upKH).totalW, 0)
  return Array.from({ length: Math.max(1, Math.ceil(total - 1e-9)) }, (_, hour) => {
    const until = Math.min(hour + 1, total)
    let highest = hour < rampHours && rampHours <= until ? peak : 0
    for (let look = 0; look <= LOOKS_AN_HOUR; look++) {
      highest = Math.max(highest, powerAt(hour + ((until - hour) * look) / LOOKS_AN_HOUR))
    }
    return highest
  })
}

/** Hours of natural cooling between two temperatures. Throws where `toC` is not above the surroundings. */
export function coolHours(segment: BakedSegment, ambientC: number, fromC: number, toC: number): number {
  return coolSeconds(heatedTube(segment, ambientC), celsiusToKelvin(fromC), celsiusToKelvin(toC)) / 3600
}

/** Tubes that differ by less than this share are the same size. */
const SAME_SIZE = 0.01

/** The bake that the figures of an objection are worked out for where none is named. */
const USUAL_BAKE = { ambientC: 18, celsius: 150 }

/** Why two segments cannot be heated in series, with the figures; null when they can. */
export function pairObjection(
  one: BakedSegment,
  other: BakedSegment,
  { ambientC, celsius }: { ambientC: number; celsius: number } = USUAL_BAKE,
): string | null {
  if (Math.abs(one.innerDiameterM / other.innerDiameterM - 1) <= SAME_SIZE) return null
  const [wide, narrow] = one.innerDiameterM > other.innerDiameterM ? [one, other] : [other, one]
  const { amps } = ampsAndVolts([wide], ambientC, celsius, 0)
  const got = (amps ** 2 * resistanceOhm(narrow, celsius)) / 1000
  const needed =
    (holdPower(heatedTube(narrow, ambientC), celsiusToKelvin(celsius)) * (narrow.endM - narrow.startM)) / 1000
  return `${one.tag} (${one.innerDiameterM.toFixed(2)} m) and ${other.tag} (${other.innerDiameterM.toFixed(2)} m) cannot be heated in series: the ${amps.toFixed(0)} A that hold ${wide.tag} at ${celsius} °C would give ${narrow.tag} ${got.toFixed(1)} kW against the ${needed.toFixed(1)} kW it needs, and overheat it. Choose a partner of the same diameter, or heat them apart.`
}
