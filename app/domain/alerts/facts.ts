/**
 * What the conditions of alerts are judged by, and what comes out. Instants inside series and stretches are
 * milliseconds UTC, so that neither change of the clocks makes a night longer or shorter.
 */
import type { AlertCondition, AlertPriority } from '../alert-words.ts'
import type { SegmentState } from '../segment-states.ts'

/** Readings of one position as they are believed now. Any order; readings of one instant stand in the order of the list. */
export interface Series {
  tag: string
  /** Spacing that its source declares, s. */
  periodS: number
  at: ArrayLike<number>
  /** In the quantity's unit; NaN where the logger wrote a word. */
  value: ArrayLike<number>
  /** Stored quality codes, see domain/readings.ts. */
  quality: ArrayLike<number>
  marks: ArrayLike<number>
  /** Limit that an over- or under-range reading names; NaN where there is none, then its value is taken. */
  bound: ArrayLike<number> | null
}

/** Half open: it holds from `fromMs` and no longer at `toMs`; null is open. */
export interface Stretch {
  fromMs: number
  toMs: number | null
}
export interface StateStretch extends Stretch {
  state: SegmentState
}
/** A limit with its dates. */
export interface LimitStretch extends Stretch {
  value: number
}
/** Something that upsets readings for a while: a valve worked by hand, a gauge changed, a pump started. */
export interface Disturbance {
  atMs: number
  what: string
}
/** A planned course, straight between its points; nothing is planned before the first and after the last. */
export interface Course {
  at: ArrayLike<number>
  value: ArrayLike<number>
}

export interface AlertSubject {
  kind: 'segment' | 'position' | 'source' | 'permit' | 'site'
  tag: string
  /** Segment it belongs to, for titles; null where it has none. */
  segment: string | null
}

interface Common {
  /** States of the segment with their own dates; empty where the subject has no segment. */
  states: readonly StateStretch[]
  disturbances: readonly Disturbance[]
}

export interface PressureFacts extends Common {
  series: Series
  /** Dated limits of the register. While one holds it goes before the rule's own figure. */
  limits: readonly LimitStretch[]
}
export interface SeriesFacts extends Common {
  series: Series
}

/** Something on the tube that bears less heat than the tube: a valve, a sealed item. */
export interface HeatLimitedPart {
  tag: string
  limitC: number
  /** Share of the tube's rise above ambient that the part reaches; 1 for the tube itself. */
  riseShare: number
}
export interface OverTemperatureFacts extends Common {
  series: Series
  /** Planned temperature, °C; null where nothing is planned. */
  setpoint: Course | null
  parts: readonly HeatLimitedPart[]
  ambientC: number
}
export interface RampFacts extends Common {
  series: Series
  /** Planned rates, °C/h; outside them only the hard limit holds. */
  planned: readonly LimitStretch[]
}
export interface SpreadFacts extends Common {
  /** Thermocouples of the segment in the order of their places along it. */
  thermocouples: readonly Series[]
}
export interface ThermocoupleFacts extends Common {
  series: Series
  neighbours: readonly Series[]
  /** Stretches in which the heating is controlled or limited by it. */
  controls: readonly Stretch[]
}

export interface NoDataFacts extends Common {
  series: Series
  /** Delivers as it goes along, so that its silence shows on the clock. */
  live: boolean
  /** Last instant of the newest accepted file, for a source that delivers files; silence counts up to there. */
  fileEndMs: number | null
  /** Stretches in which the source was declared off. */
  off: readonly Stretch[]
  /** Stretches in which a segment that it watches was heated. */
  heated: readonly Stretch[]
}
export interface FileFacts extends Common {
  /** Zone of the site, for its days. */
  zone: string
  /** Accepted files: last instant in each, and when it was accepted. */
  accepted: readonly { endMs: number; acceptedMs: number }[]
  /** Stretches in which the logger is or was declared off. */
  off: readonly Stretch[]
}

export interface IonCurrentFacts extends Common {
  current: Series
  /** A gauge of the same segment; null where there is none. */
  pressure: Series | null
  /** Current that the pump draws for each Pa at that gauge, A/Pa; null where nobody has said. */
  ampsPerPa: number | null
  /** Stretches in which its supply is known to be on; null where nobody knows. */
  supplyOn: readonly Stretch[] | null
}
export interface PumpFacts extends Common {
  /** °C */
  bearing: Series | null
  /** Per cent of the rated speed. */
  speed: Series | null
  /** 1 while it is cooled. */
  cooling: Series | null
}
export interface GaugesFacts extends Common {
  /** With what each is expected to read relative to the others: gas basis and place along the tube. */
  gauges: readonly { series: Series; expected: number }[]
}
export interface PredictionFacts extends Common {
  series: Series
  /** 90 % band of the forecast, Pa, straight in log p between its points; null where there is none. */
  band: { at: ArrayLike<number>; low: ArrayLike<number>; high: ArrayLike<number>; madeMs: number } | null
}
export interface SupplyFacts extends Common {
  volts: Series | null
  amps: Series | null
  /** 1 while the earth-fault relay has tripped. */
  earthFault: Series | null
  /** Ω */
  joint: Series | null
  plannedVolts: Course | null
  plannedAmps: Course | null
  /** Joint resistance when it was made, Ω. */
  jointAtStart: number | null
}

/** A thing that holds for a while, by itself a reason for the alert. */
export interface Standing extends Stretch {
  /** The same while it is the same thing. */
  key: string
  what: string
  value?: number | null
  limit?: number | null
  unit?: string
}
export interface GaugeHealthFacts extends Common {
  calibrationDueMs: number | null
  filament: { hours: number; asOfMs: number; lifeHours: number } | null
  /** Sensitivity against the last one as a ratio, and when it was found. */
  sensitivity: { ratio: number; foundMs: number } | null
}
export interface PowerFacts extends Common {
  /** Planned power by stretches beside the cap that holds in them, kW. */
  hours: readonly (Stretch & { kW: number; capKW: number; where: string })[]
  /** When the plan that says so was made. */
  plannedMs: number
}
export interface PermitFacts extends Common {
  /** While it is live: until when it is valid, as that was known in each stretch. */
  validity: readonly (Stretch & { untilMs: number })[]
  /** Dangers with their dates from the safety events. */
  dangers: readonly (Standing & { priority: AlertPriority })[]
}
export interface EntryFacts extends Common {
  entries: readonly Standing[]
}
export interface OxygenFacts extends Common {
  readings: readonly { atMs: number; percent: number; place: string; instrument: string }[]
  /** When an officer released the stretch. */
  releasesMs: readonly number[]
}
export interface MailFacts extends Common {
  /** Mails given up until they were delivered after all, and steps of the ladder with nobody on them. */
  failures: readonly (Stretch & { key: string; what: string; tries: number })[]
  holes: readonly Standing[]
}

export interface FactsOf extends Record<AlertCondition, Common> {
  'pressure-above-limit': PressureFacts
  'pressure-above-target': PressureFacts
  'fast-rise': SeriesFacts
  'slow-rise': SeriesFacts
  'pressure-while-heating': PressureFacts
  'no-data': NoDataFacts
  'file-missing': FileFacts
  'over-temperature': OverTemperatureFacts
  'ramp-too-fast': RampFacts
  spread: SpreadFacts
  'thermocouple-suspect': ThermocoupleFacts
  'ion-current': IonCurrentFacts
  'pump-fault': PumpFacts
  'gauges-disagree': GaugesFacts
  'off-prediction': PredictionFacts
  'gauge-health': GaugeHealthFacts
  'supply-fault': SupplyFacts
  'power-above-cap': PowerFacts
  permit: PermitFacts
  'excluded-entry': EntryFacts
  oxygen: OxygenFacts
  'mail-undelivered': MailFacts
}

/** Judged is what lies in it: from `from` on and before `until`. */
export interface AlertWindow {
  from: Date
  until: Date
}

export interface AlertEvent {
  kind: 'raise' | 'clear' | 'worsen'
  /** When it was certain, in the data: the delay is over. Never before the window and never after its end. */
  at: Date
  /** When what it tells began: the first reading beyond the limit, or the first back within it. */
  since: Date
  priority: AlertPriority
  value: number | null
  limit: number | null
  unit: string
  /** Place, what and how bad, for the subject of a mail. */
  title: string
  /** In whole sentences. */
  detail: { text: string; [more: string]: unknown }
}

export interface Evaluation {
  events: AlertEvent[]
  /** Goes through JSON unchanged. Null begins anew. */
  memory: unknown
  /** Whether it could be judged at the end of the window. False is not "in order". */
  evaluable: boolean
  /** Why not; empty when it could. */
  why: string
  /** The state that keeps it from being watched at the end of the window, and since when. */
  suppressed: { state: SegmentState; since: Date } | null
}
