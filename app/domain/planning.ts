/** Words shared by forecasts of record, isolation tests, bake plans and their schedule. */

/** Recorded by whoever ran it, then accepted by an engineer; voided when it proves to say nothing. */
export const ISOLATION_TEST_STATES = ['recorded', 'accepted', 'voided'] as const
export type IsolationTestState = (typeof ISOLATION_TEST_STATES)[number]

/** How a forecast of record came out: inside its range, before it, after it; spoiled when the segment was handled. */
export const FORECAST_OUTCOMES = ['open', 'inside', 'early', 'late', 'spoiled'] as const
export type ForecastOutcome = (typeof FORECAST_OUTCOMES)[number]

/** A draft may lack steps; a ready plan is signed and its version frozen as the baseline. */
export const BAKE_PLAN_STATES = ['draft', 'ready', 'under-way', 'done', 'withdrawn'] as const
export type BakePlanState = (typeof BAKE_PLAN_STATES)[number]

export const PLAN_PRIORITIES = ['normal', 'urgent', 'can-wait'] as const
export type PlanPriority = (typeof PLAN_PRIORITIES)[number]

/** What a schedule is made for. */
export const SCHEDULE_OBJECTIVES = ['earliest-finish', 'least-energy', 'fewest-nights'] as const
export type ScheduleObjective = (typeof SCHEDULE_OBJECTIVES)[number]

export const SCHEDULE_STATES = ['draft', 'solving', 'solved', 'failed', 'current', 'replaced'] as const
export type ScheduleState = (typeof SCHEDULE_STATES)[number]

export const DEVIATION_KINDS = [
  'temperature',
  'spread',
  'ramp-rate',
  'pressure',
  'energy',
  'time',
  'supply',
  'other',
] as const
export type DeviationKind = (typeof DEVIATION_KINDS)[number]
