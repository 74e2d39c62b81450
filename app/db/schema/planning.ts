import {
  boolean,
  double,
  index,
  int,
  mysqlTable,
  primaryKey,
  smallint,
  text,
  uniqueIndex,
  varchar,
} from 'drizzle-orm/mysql-core'
import { z } from 'zod'
import {
  BAKE_PLAN_STATES,
  DEVIATION_KINDS,
  FORECAST_OUTCOMES,
  ISOLATION_TEST_STATES,
  PLAN_PRIORITIES,
  SCHEDULE_OBJECTIVES,
  SCHEDULE_STATES,
} from '../../domain/planning.ts'
import { id, json, ref, utc } from '../columns.ts'
import { person } from './people.ts'
import { position, pump, segment, supplySet } from './register.ts'
import { signedAct } from './shared.ts'

/** A rate-of-rise test of an isolated segment. Its window and result stand as they were when it was recorded. */
export const isolationTest = mysqlTable(
  'isolation_test',
  {
    id: id(),
    segmentId: ref('segment_id')
      .notNull()
      .references(() => segment.id),
    positionId: ref('position_id')
      .notNull()
      .references(() => position.id),
    state: varchar('state', { length: 12, enum: ISOLATION_TEST_STATES }).notNull(),
    closedAt: utc('closed_at').notNull(),
    fitFrom: utc('fit_from').notNull(),
    fitTo: utc('fit_to').notNull(),
    limitPaPerHour: double('limit_pa_per_hour').notNull(),
    /** The fit of the window, see domain/isolation-tests.ts. */
    result: json('result', z.unknown()).notNull(),
    note: varchar('note', { length: 1000 }).notNull().default(''),
    recordedBy: ref('recorded_by')
      .notNull()
      .references(() => person.id),
    recordedAt: utc('recorded_at').notNull(),
    acceptedBy: ref('accepted_by').references(() => person.id),
    acceptedAt: utc('accepted_at'),
    acceptRemark: varchar('accept_remark', { length: 1000 }).notNull().default(''),
    acceptSignedActId: ref('accept_signed_act_id').references(() => signedAct.id),
    voidedBy: ref('voided_by').references(() => person.id),
    voidedAt: utc('voided_at'),
    voidRemark: varchar('void_remark', { length: 1000 }).notNull().default(''),
    voidSignedActId: ref('void_signed_act_id').references(() => signedAct.id),
    revision: int('revision').notNull().default(1),
  },
  (t) => [index('isolation_test_segment_ix').on(t.segmentId, t.closedAt)],
)

/** A forecast that somebody put on record, and how it came out. */
export const forecastRecord = mysqlTable(
  'forecast_record',
  {
    id: id(),
    segmentId: ref('segment_id')
      .notNull()
      .references(() => segment.id),
    positionId: ref('position_id')
      .notNull()
      .references(() => position.id),
    madeBy: ref('made_by')
      .notNull()
      .references(() => person.id),
    madeAt: utc('made_at').notNull(),
    /** Start of the pump-down the hours count from. */
    startedAt: utc('started_at').notNull(),
    windowFrom: utc('window_from').notNull(),
    windowTo: utc('window_to').notNull(),
    targetPa: double('target_pa').notNull(),
    medianAt: utc('median_at').notNull(),
    /** Ends of the 80 % range; no end where the range is open. */
    lowAt: utc('low_at').notNull(),
    highAt: utc('high_at'),
    model: json('model', z.unknown()).notNull(),
    note: varchar('note', { length: 1000 }).notNull().default(''),
    outcome: varchar('outcome', { length: 12, enum: FORECAST_OUTCOMES }).notNull().default('open'),
    reachedAt: utc('reached_at'),
    judgedAt: utc('judged_at'),
    outcomeReason: varchar('outcome_reason', { length: 500 }).notNull().default(''),
  },
  (t) => [
    index('forecast_record_segment_ix').on(t.segmentId, t.madeAt),
    index('forecast_record_outcome_ix').on(t.outcome, t.judgedAt),
  ],
)

/** A bake that is meant to happen. Its content is in its versions; the baseline is the version signed as ready. */
export const bakePlan = mysqlTable(
  'bake_plan',
  {
    id: id(),
    title: varchar('title', { length: 120 }).notNull(),
    state: varchar('state', { length: 12, enum: BAKE_PLAN_STATES }).notNull(),
    priority: varchar('priority', { length: 12, enum: PLAN_PRIORITIES }).notNull().default('normal'),
    version: int('version').notNull().default(1),
    baselineVersion: int('baseline_version'),
    createdBy: ref('created_by')
      .notNull()
      .references(() => person.id),
    createdAt: utc('created_at').notNull(),
    readyBy: ref('ready_by').references(() => person.id),
    readyAt: utc('ready_at'),
    readySignedActId: ref('ready_signed_act_id').references(() => signedAct.id),
    closedBy: ref('closed_by').references(() => person.id),
    closedAt: utc('closed_at'),
    closeReason: varchar('close_reason', { length: 1000 }).notNull().default(''),
    revision: int('revision').notNull().default(1),
  },
  (t) => [index('bake_plan_state_ix').on(t.state, t.id)],
)

/** Segments of a plan: one, or two in series. */
export const bakePlanSegment = mysqlTable(
  'bake_plan_segment',
  {
    planId: ref('plan_id')
      .notNull()
      .references(() => bakePlan.id),
    segmentId: ref('segment_id')
      .notNull()
      .references(() => segment.id),
    sortOrder: smallint('sort_order').notNull(),
  },
  (t) => [
    primaryKey({ name: 'bake_plan_segment_pk', columns: [t.planId, t.segmentId] }),
    index('bake_plan_segment_ix').on(t.segmentId),
  ],
)

/** One version of a plan; never edited. */
export const bakePlanVersion = mysqlTable(
  'bake_plan_version',
  {
    id: id(),
    planId: ref('plan_id')
      .notNull()
      .references(() => bakePlan.id),
    version: int('version').notNull(),
    /** See domain/bake-plan.ts. */
    content: json('content', z.unknown()).notNull(),
    /** What the model expects of this content, as computed when it was saved. */
    predicted: json('predicted', z.unknown()),
    reason: varchar('reason', { length: 1000 }).notNull().default(''),
    madeBy: ref('made_by')
      .notNull()
      .references(() => person.id),
    madeAt: utc('made_at').notNull(),
  },
  (t) => [uniqueIndex('bake_plan_version_uq').on(t.planId, t.version)],
)

/** Ticks of the readiness checklist that a person gives; the rest is computed. */
export const bakePlanCheck = mysqlTable(
  'bake_plan_check',
  {
    id: id(),
    planId: ref('plan_id')
      .notNull()
      .references(() => bakePlan.id),
    item: varchar('item', { length: 60 }).notNull(),
    done: boolean('done').notNull(),
    note: varchar('note', { length: 500 }).notNull().default(''),
    setBy: ref('set_by')
      .notNull()
      .references(() => person.id),
    setAt: utc('set_at').notNull(),
  },
  (t) => [index('bake_plan_check_ix').on(t.planId, t.item, t.id)],
)

/** Bakes placed in time. One schedule is current; others are drafts to compare. */
export const bakeSchedule = mysqlTable(
  'bake_schedule',
  {
    id: id(),
    title: varchar('title', { length: 120 }).notNull(),
    state: varchar('state', { length: 12, enum: SCHEDULE_STATES }).notNull(),
    objective: varchar('objective', { length: 20, enum: SCHEDULE_OBJECTIVES }).notNull(),
    fromAt: utc('from_at').notNull(),
    untilAt: utc('until_at').notNull(),
    /** Share of the search done, 0 to 1, while it is solving. */
    progress: double('progress').notNull().default(0),
    /** Value reached, lower bound, why-nots: see domain/schedule. */
    outcome: json('outcome', z.unknown()),
    fault: text('fault'),
    madeBy: ref('made_by')
      .notNull()
      .references(() => person.id),
    madeAt: utc('made_at').notNull(),
    revision: int('revision').notNull().default(1),
  },
  (t) => [index('bake_schedule_state_ix').on(t.state, t.id)],
)

/** When a plan starts in a schedule, and with which supply set, cart and crew. */
export const bakePlacement = mysqlTable(
  'bake_placement',
  {
    scheduleId: ref('schedule_id')
      .notNull()
      .references(() => bakeSchedule.id),
    planId: ref('plan_id')
      .notNull()
      .references(() => bakePlan.id),
    /** Start of heating; preparation lies before it. Null while there is no place for it. */
    startsAt: utc('starts_at'),
    supplySetId: ref('supply_set_id').references(() => supplySet.id),
    cartId: ref('cart_id').references(() => pump.id),
    pinned: boolean('pinned').notNull().default(false),
    /** What stands in the way, in words, when there is no place or a person moved it against the rules. */
    trouble: json('trouble', z.array(z.string())),
  },
  (t) => [primaryKey({ name: 'bake_placement_pk', columns: [t.scheduleId, t.planId] })],
)

/** A crew that can be put on a ramp. */
export const crew = mysqlTable(
  'crew',
  {
    id: id(),
    code: varchar('code', { length: 12 }).notNull(),
    name: varchar('name', { length: 80 }).notNull(),
    size: smallint('size').notNull(),
    /** Hours worked, and on call, by day of the week: see domain/schedule. */
    roster: json('roster', z.unknown()).notNull(),
    endsAt: utc('ends_at'),
    revision: int('revision').notNull().default(1),
  },
  (t) => [uniqueIndex('crew_code_uq').on(t.code)],
)

/** A day on which no crew works, by site date (YYYY-MM-DD). */
export const holiday = mysqlTable('holiday', {
  day: varchar('day', { length: 10 }).primaryKey(),
  name: varchar('name', { length: 80 }).notNull(),
})

/** Where a bake left its plan, or its limits. */
export const bakeDeviation = mysqlTable(
  'bake_deviation',
  {
    id: id(),
    segmentId: ref('segment_id')
      .notNull()
      .references(() => segment.id),
    planId: ref('plan_id').references(() => bakePlan.id),
    kind: varchar('kind', { length: 16, enum: DEVIATION_KINDS }).notNull(),
    startsAt: utc('starts_at').notNull(),
    endsAt: utc('ends_at'),
    detail: varchar('detail', { length: 1000 }).notNull(),
    /** Null when the product noted it by itself. */
    notedBy: ref('noted_by').references(() => person.id),
    notedAt: utc('noted_at').notNull(),
  },
  (t) => [index('bake_deviation_segment_ix').on(t.segmentId, t.startsAt)],
)
