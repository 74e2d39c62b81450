/** Figures by which a rule of each condition judges: names, labels and units. Delays, coverage and priority stand beside them. */
import type { AlertRuleContent } from '../alert-rules.ts'
import type { AlertCondition } from '../alert-words.ts'

export interface FigureFacts {
  label: string
  unit: string
  /** Values outside are refused. */
  least: number
  most: number
}

function pa(label: string): FigureFacts {
  return { label, unit: 'Pa', least: 1e-12, most: 2e5 }
}
function celsius(label: string, most = 600): FigureFacts {
  return { label, unit: '°C', least: 0, most }
}
function ratio(label: string, most = 1000): FigureFacts {
  return { label, unit: '', least: 1, most }
}
function share(label: string): FigureFacts {
  return { label, unit: '', least: 0, most: 1 }
}
function seconds(label: string): FigureFacts {
  return { label, unit: 's', least: 0, most: 30 * 86_400 }
}
function number(label: string, unit: string, least: number, most: number): FigureFacts {
  return { label, unit, least, most }
}

const QUIET = seconds('Not judged for so long after a disturbance')
const BIN = number('Readings are averaged over', 's', 60, 86_400)

const ALERT_FIGURES: Record<AlertCondition, Record<string, FigureFacts>> = {
  'pressure-above-limit': { limitPa: pa('Limit'), clearRatio: ratio('Clears below the limit divided by') },
  'pressure-above-target': { limitPa: pa('Target'), clearRatio: ratio('Clears below the target divided by') },
  'fast-rise': {
    ratio: ratio('Rise within the window, times'),
    windowS: number('Window', 's', 60, 86_400),
    floorPa: pa('Only above'),
    clearRatio: ratio('Clears below a rise of, times'),
    quietAfterS: QUIET,
  },
  'slow-rise': {
    perDay: number('Rise a day', '', 0.001, 10),
    windowS: number('Window', 's', 7200, 30 * 86_400),
    clearPerDay: number('Clears below a rise a day of', '', 0, 10),
    quietAfterS: QUIET,
  },
  'pressure-while-heating': {
    holdPa: pa('Hold the ramp above'),
    abortPa: pa('Abort advised above'),
    clearRatio: ratio('Clears below the limit divided by'),
  },
  'no-data': {
    periods: number('Periods without a good reading', '', 1, 1000),
    extraS: seconds('and so much more'),
    clearSamples: number('Clears after so many good readings', '', 1, 100),
  },
  'file-missing': {
    dueMinute: number('Due, minutes after midnight of the site', 'min', 361, 1439),
    worsenMinute: number('Grows to medium, minutes after midnight of the site', 'min', 361, 1439),
    lookBackDays: number('A night is waited for', 'd', 1, 31),
  },
  'over-temperature': {
    aboveSetpointC: celsius('Above the planned temperature by', 200),
    deadbandC: celsius('Clears below the limit by', 100),
  },
  'ramp-too-fast': {
    aboveCPerH: number('Above the planned rate by', '°C/h', 0, 100),
    hardCPerH: number('In any case above', '°C/h', 0.1, 200),
    windowS: number('Window', 's', 300, 86_400),
    quietAfterS: QUIET,
  },
  spread: {
    spreadC: celsius('Highest less lowest'),
    neighbourC: celsius('Between neighbours'),
    rampSpreadC: celsius('Highest less lowest in the beginning of a ramp'),
    rampNeighbourC: celsius('Between neighbours in the beginning of a ramp'),
    rampS: seconds('The beginning of a ramp lasts'),
    deadbandC: celsius('Clears below the limit by', 100),
  },
  'thermocouple-suspect': {
    openC: number('Reads as an open wire from', '°C', 200, 3000),
    jumpC: celsius('Jump between two readings'),
    jumpHoldS: seconds('A jump is doubted for'),
    flatC: celsius('Flat: moves by no more than'),
    movingC: celsius('while its neighbours move by'),
    flatS: number('within', 's', 600, 86_400),
  },
  'ion-current': {
    ratio: ratio('Apart from what the pressure asks for, times'),
    clearRatio: ratio('Clears within, times'),
    zeroA: number('Counts as zero below', 'A', 0, 1),
    quietAfterS: QUIET,
  },
  'pump-fault': {
    bearingC: celsius('Bearing above', 200),
    speedPercent: number('Speed below', '%', 1, 100),
    deadbandC: celsius('Bearing clears below the limit by', 100),
    deadbandPercent: number('Speed clears above the limit by', '%', 0, 50),
    quietAfterS: QUIET,
  },
  'gauges-disagree': {
    ratio: ratio('Apart by more than, times'),
    clearRatio: ratio('Clears below, times'),
    binS: BIN,
    quietAfterS: QUIET,
  },
  'off-prediction': {
    binS: BIN,
    youngS: seconds('A forecast is not held against readings for its first'),
    quietAfterS: QUIET,
  },
  'gauge-health': {
    filamentShare: share('Share of the filament’s life used'),
    calibrationDays: number('Calibration due within', 'd', 0, 400),
    sensitivity: ratio('Sensitivity changed by more than, times', 100),
  },
  'supply-fault': {
    offPlanShare: share('Volts or amps off plan by the share'),
    jointShare: share('Joint resistance up by the share'),
    deadbandShare: share('Clears within this share of the limit'),
  },
  'power-above-cap': { aheadS: seconds('Looks ahead'), slackKW: number('Rounding allowed', 'kW', 0, 10) },
  permit: { firstS: seconds('First notice before the end'), lastS: seconds('Last notice before the end') },
  'excluded-entry': {},
  oxygen: {
    lowPercent: number('Too little below', '%', 15, 20.9),
    highPercent: number('Too much above', '%', 21, 30),
    releasePercent: number('Clears from', '%', 19.5, 20.9),
    releaseS: seconds('held for'),
  },
  'mail-undelivered': { tries: number('Given up after', '', 1, 100) },
}

/** What keeps a rule's figures from being used: one sentence a figure, empty when all is well. */
export function figureFaults(condition: AlertCondition, content: AlertRuleContent): string[] {
  return Object.entries(ALERT_FIGURES[condition]).flatMap(([name, { label, unit, least, most }]) => {
    const found = content.figures[name]
    if (found !== undefined && found >= least && found <= most) return []
    const range = `${least} to ${most}${unit === '' ? '' : ` ${unit}`}`
    return found === undefined
      ? [`The rule does not say “${label}”: a figure from ${range} is needed.`]
      : [`“${label}” is ${found}: a figure from ${range} is needed.`]
  })
}
