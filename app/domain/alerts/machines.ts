/** A12, A13 and A17: ion pumps, mobile pumps and direct-current supplies. */
import type { IonCurrentFacts, PumpFacts, Series, SupplyFacts } from './facts.ts'
import { type Case, figure, follow, heldAt, type Judge, notEvaluable, quietTimes } from './judge.ts'
import { BACK, BETWEEN, BEYOND, UNKNOWN, type Zone } from './latch.ts'
import { judgeParts, type PartRule } from './parts.ts'
import { figureText, measured, zoneAbove, zoneBelow } from './series.ts'

/** Newest measured value of another series at ascending instants, while it is no older than three of its periods. */
export function beside(series: Series): (ms: number) => number {
  const reachMs = 3000 * series.periodS
  let i = 0
  let value = Number.NaN
  let valueMs = Number.NEGATIVE_INFINITY
  return (ms) => {
    for (; i < series.at.length && (series.at[i] as number) <= ms; i += 1) {
      const found = measured(series, i)
      if (Number.isNaN(found)) continue
      value = found
      valueMs = series.at[i] as number
    }
    return ms - valueMs <= reachMs ? value : Number.NaN
  }
}

/** A12: against what the pressure asks for, and zero though the supply is on. */
export function judgeIonCurrent(of: Case<IonCurrentFacts>): Judge {
  const { current, pressure, ampsPerPa, supplyOn, disturbances } = of.facts
  const ratio = figure(of, 'ratio')
  const clearRatio = figure(of, 'clearRatio')
  const zeroA = figure(of, 'zeroA')
  const expectedFrom = () => {
    const pressureAt = pressure === null ? () => Number.NaN : beside(pressure)
    return (at: number) => (ampsPerPa ?? Number.NaN) * pressureAt(at)
  }
  const judge = judgeParts(of, [
    {
      part: 'current',
      series: current,
      unit: 'A',
      priority: of.content.priority,
      start() {
        const quiet = quietTimes(disturbances, figure(of, 'quietAfterS'))
        const expectedAt = expectedFrom()
        return (i, at): Zone => {
          const value = measured(current, i)
          const expected = expectedAt(at)
          if (quiet(at) || Number.isNaN(value)) return UNKNOWN
          if (supplyOn !== null && !heldAt(supplyOn, at)) return UNKNOWN
          // Zero with a supply of which nobody knows whether it is on says nothing.
          if (value < zeroA) return supplyOn === null ? UNKNOWN : BEYOND
          if (Number.isNaN(expected) || expected <= 0) return UNKNOWN
          const apart = Math.max(value / expected, expected / value)
          return apart > ratio ? BEYOND : apart < clearRatio ? BACK : BETWEEN
        }
      },
      describe(value, at) {
        const expected = expectedFrom()(at)
        const asks = Number.isNaN(expected) ? '' : ` (pressure asks for ${figureText(expected, 'A')})`
        return {
          limit: Number.isNaN(expected) ? zeroA : value > expected ? expected * ratio : expected / ratio,
          what: `${current.tag} ion current ${figureText(value, 'A')}${asks}`,
          text: `${current.tag} draws ${figureText(value, 'A')}${asks}; told when apart by more than ${figureText(ratio, '')} times, or zero with the supply on.`,
        }
      },
    },
  ])
  return {
    ...judge,
    verdict(untilMs) {
      if (supplyOn !== null && !heldAt(supplyOn, untilMs - 1)) {
        return notEvaluable(`${current.tag}: its supply is not on.`)
      }
      const verdict = judge.verdict(untilMs)
      if (verdict.evaluable || (pressure !== null && ampsPerPa !== null)) return verdict
      return notEvaluable(
        `${current.tag}: ${pressure === null ? 'no gauge to hold it against' : 'nobody has said what current a pressure asks for'}.`,
      )
    },
  }
}

/** A13: bearing, speed and cooling of a mobile pump, not in its first minutes. */
export function judgePump(of: Case<PumpFacts>): Judge {
  const { bearing, speed, cooling, disturbances } = of.facts
  const { priority } = of.content
  const bearingC = figure(of, 'bearingC')
  const speedPercent = figure(of, 'speedPercent')
  function rule(
    series: Series | null,
    part: Pick<PartRule, 'part' | 'unit' | 'describe' | 'sign'>,
    zone: (series: Series, i: number) => Zone,
  ): PartRule[] {
    if (series === null) return []
    return [
      {
        ...part,
        series,
        priority,
        start() {
          const quiet = quietTimes(disturbances, figure(of, 'quietAfterS'))
          return (i, at) => (quiet(at) ? UNKNOWN : zone(series, i))
        },
      },
    ]
  }
  return judgeParts(of, [
    ...rule(
      bearing,
      {
        part: 'bearing',
        unit: '°C',
        describe: (value) => ({
          limit: bearingC,
          what: `bearing ${figureText(value, '°C')} (limit ${figureText(bearingC, '')})`,
          text: `The bearing reads ${figureText(value, '°C')}; the limit is ${figureText(bearingC, '°C')}.`,
        }),
      },
      (series, i) => zoneAbove(series, i, bearingC, bearingC - figure(of, 'deadbandC')),
    ),
    ...rule(
      speed,
      {
        part: 'speed',
        unit: '%',
        sign: -1,
        describe: (value) => ({
          limit: speedPercent,
          what: `pump speed ${figureText(value, '%')} (limit ${figureText(speedPercent, '')})`,
          text: `The pump runs at ${figureText(value, '%')} of its rated speed; at least ${figureText(speedPercent, '%')} are asked for.`,
        }),
      },
      (series, i) => zoneBelow(series, i, speedPercent, speedPercent + figure(of, 'deadbandPercent')),
    ),
    ...rule(
      cooling,
      {
        part: 'cooling',
        unit: '',
        sign: -1,
        describe: (value) => ({
          limit: 1,
          what: `pump cooling ${value >= 0.5 ? 'on' : 'off'}`,
          text: `The cooling of the pump says “${value >= 0.5 ? 'on' : 'off'}”.`,
        }),
      },
      (series, i) => {
        const value = measured(series, i)
        return Number.isNaN(value) ? UNKNOWN : value < 0.5 ? BEYOND : BACK
      },
    ),
  ])
}

/** A17: earth fault, volts and amps off plan, joint resistance. */
export function judgeSupply(of: Case<SupplyFacts>): Judge {
  const { volts, amps, earthFault, joint, plannedVolts, plannedAmps, jointAtStart } = of.facts
  const { priority } = of.content
  const offPlan = figure(of, 'offPlanShare')
  const jointShare = figure(of, 'jointShare')
  const within = figure(of, 'deadbandShare')
  function againstPlan(
    part: 'volts' | 'amps',
    series: Series | null,
    course: SupplyFacts['plannedVolts'],
  ): PartRule[] {
    if (series === null || course === null) return []
    const unit = part === 'volts' ? 'V' : 'A'
    return [
      {
        part,
        series,
        unit,
        priority,
        start() {
          const plannedAt = follow(course)
          return (i, at) => {
            const value = measured(series, i)
            const planned = plannedAt(at)
            if (Number.isNaN(value) || !(planned > 0)) return UNKNOWN
            const apart = Math.abs(value / planned - 1)
            return apart > offPlan ? BEYOND : apart < within * offPlan ? BACK : BETWEEN
          }
        },
        describe(value, at) {
          const planned = follow(course)(at)
          const percent = 100 * (value / planned - 1)
          return {
            limit: planned,
            what: `${series.tag} ${figureText(value, unit)}, plan ${figureText(planned, unit)} (${percent > 0 ? '+' : ''}${percent.toFixed(0)} %)`,
            text: `${series.tag} gives ${figureText(value, unit)} where ${figureText(planned, unit)} are planned; ${(100 * offPlan).toFixed(0)} % either way are allowed.`,
          }
        },
        unlimited: (at) => !(follow(course)(at) > 0),
      },
    ]
  }
  const earth: PartRule[] =
    earthFault === null
      ? []
      : [
          {
            part: 'earth',
            series: earthFault,
            unit: '',
            priority,
            start: () => (i) => {
              const value = measured(earthFault, i)
              return Number.isNaN(value) ? UNKNOWN : value >= 0.5 ? BEYOND : BACK
            },
            describe: (value) => ({
              limit: 0,
              what: value >= 0.5 ? 'earth fault at the supply' : 'no earth fault any more',
              text: `The earth-fault relay ${earthFault.tag} ${value >= 0.5 ? 'has tripped' : 'is back'}.`,
            }),
          },
        ]
  const atStart = jointAtStart ?? Number.NaN
  const jointLimit = atStart * (1 + jointShare)
  const joints: PartRule[] =
    joint === null || !(atStart > 0)
      ? []
      : [
          {
            part: 'joint',
            series: joint,
            unit: 'Ω',
            priority,
            start: () => (i) => zoneAbove(joint, i, jointLimit, atStart * (1 + within * jointShare)),
            describe: (value) => ({
              limit: jointLimit,
              what: `${joint.tag} joint resistance ${figureText(value, 'Ω')} (limit ${figureText(jointLimit, '')})`,
              text: `${joint.tag} has ${figureText(value, 'Ω')}; made with ${figureText(atStart, 'Ω')}, and ${(100 * jointShare).toFixed(0)} % more are allowed.`,
            }),
          },
        ]
  return judgeParts(of, [
    ...earth,
    ...againstPlan('volts', volts, plannedVolts),
    ...againstPlan('amps', amps, plannedAmps),
    ...joints,
  ])
}
