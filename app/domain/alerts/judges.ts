/** Which judge belongs to which condition. */
import type { AlertCondition } from '../alert-words.ts'
import { judgeAir } from './air.ts'
import type { FactsOf, Series } from './facts.ts'
import { judgeGauges, judgePrediction } from './gauges.ts'
import type { Case, Judge } from './judge.ts'
import { judgeOverTemperature, judgePressure, judgePressureHot } from './levels.ts'
import { judgeIonCurrent, judgePump, judgeSupply } from './machines.ts'
import { judgeFastRise, judgeRamp, judgeSlowRise } from './rates.ts'
import { inOrder } from './series.ts'
import { judgeFiles, judgeNoData } from './silence.ts'
import { judgeEntries, judgeGaugeHealth, judgeMail, judgePermit, judgePower } from './standings.ts'
import { judgeThermocouple } from './thermocouple.ts'
import { judgeSpread } from './tube.ts'

const JUDGES: { [C in AlertCondition]: (of: Case<FactsOf[C]>) => Judge } = {
  'pressure-above-limit': (of) => judgePressure(of, 'limit'),
  'pressure-above-target': (of) => judgePressure(of, 'target'),
  'fast-rise': judgeFastRise,
  'slow-rise': judgeSlowRise,
  'pressure-while-heating': judgePressureHot,
  'no-data': judgeNoData,
  'file-missing': judgeFiles,
  'over-temperature': judgeOverTemperature,
  'ramp-too-fast': judgeRamp,
  spread: judgeSpread,
  'thermocouple-suspect': judgeThermocouple,
  'ion-current': judgeIonCurrent,
  'pump-fault': judgePump,
  'gauges-disagree': judgeGauges,
  'off-prediction': judgePrediction,
  'gauge-health': judgeGaugeHealth,
  'supply-fault': judgeSupply,
  'power-above-cap': judgePower,
  permit: judgePermit,
  'excluded-entry': judgeEntries,
  oxygen: judgeAir,
  'mail-undelivered': judgeMail,
}

function isSeries(value: unknown): value is Series {
  return typeof value === 'object' && value !== null && 'periodS' in value && 'quality' in value
}

/** Facts with every series in them in the order of its instants. */
function ordered<Facts extends object>(facts: Facts): Facts {
  const mend = (value: unknown): unknown => {
    if (isSeries(value)) return inOrder(value)
    if (Array.isArray(value) && value.some((one) => isSeries(one) || isSeries(one?.series)))
      return value.map(mend)
    if (typeof value === 'object' && value !== null && 'series' in value && isSeries(value.series)) {
      return { ...value, series: inOrder(value.series) }
    }
    return value
  }
  return Object.fromEntries(Object.entries(facts).map(([name, value]) => [name, mend(value)])) as Facts
}

/** The judge of a condition, with its series in order. */
export function judgeFor<C extends AlertCondition>(condition: C, of: Case<FactsOf[C]>): Judge {
  return JUDGES[condition]({ ...of, facts: ordered(of.facts) })
}
