import {
  boolean,
  double,
  index,
  int,
  mysqlTable,
  primaryKey,
  uniqueIndex,
  varchar,
} from 'drizzle-orm/mysql-core'
import { z } from 'zod'
import {
  COMPETENCE_KINDS,
  LOCK_REMOVALS,
  PERMIT_ACTS,
  PERMIT_STATES,
  PERMIT_TEST_KINDS,
  PLANNED_WORK_KINDS,
  PLANNED_WORK_STATES,
  POINT_PURPOSES,
  SAFETY_EVENT_KINDS,
} from '../../domain/permit-words.ts'
import { id, json, ref, utc } from '../columns.ts'
import { person } from './people.ts'
import { bakePlan } from './planning.ts'
import { line, segment, supplySet } from './register.ts'
import { signedAct } from './shared.ts'

/** A heated-segment permit as it stands. What it says is in its versions, what was done to it in its acts. */
export const permit = mysqlTable(
  'permit',
  {
    id: id(),
    number: varchar('number', { length: 20 }).notNull(),
    /** Printed beside the number; an address that can be typed. */
    shortCode: varchar('short_code', { length: 8 }).notNull(),
    state: varchar('state', { length: 12, enum: PERMIT_STATES }).notNull(),
    /** Counts every act and edit: whoever acts says which revision they saw. */
    revision: int('revision').notNull().default(1),
    /** Newest version of what it says, and the one that was approved. */
    version: int('version').notNull().default(1),
    approvedVersion: int('approved_version'),
    planId: ref('plan_id').references(() => bakePlan.id),
    createdBy: ref('created_by')
      .notNull()
      .references(() => person.id),
    createdAt: utc('created_at').notNull(),
    requestedBy: ref('requested_by').references(() => person.id),
    requestedAt: utc('requested_at'),
    approvedBy: ref('approved_by').references(() => person.id),
    approvedAt: utc('approved_at'),
    /** Who holds it now; changes at a shift hand-over. */
    holderId: ref('holder_id').references(() => person.id),
    /** The window asked for, then approved, then extended. */
    windowFrom: utc('window_from'),
    windowTo: utc('window_to'),
    /** End of the current validity while it is live or suspended; kept when it has run out. */
    currentUntil: utc('current_until'),
    extensions: int('extensions').notNull().default(0),
    extendedHours: double('extended_hours').notNull().default(0),
    /** Tied to an incident: not deleted until an officer releases it. */
    held: boolean('held').notNull().default(false),
    heldReason: varchar('held_reason', { length: 500 }).notNull().default(''),
    endedAt: utc('ended_at'),
  },
  (t) => [
    uniqueIndex('permit_number_uq').on(t.number),
    uniqueIndex('permit_short_code_uq').on(t.shortCode),
    index('permit_state_ix').on(t.state, t.windowTo),
  ],
)

/** Segments of a permit. */
export const permitSegment = mysqlTable(
  'permit_segment',
  {
    permitId: ref('permit_id')
      .notNull()
      .references(() => permit.id),
    segmentId: ref('segment_id')
      .notNull()
      .references(() => segment.id),
  },
  (t) => [
    primaryKey({ name: 'permit_segment_pk', columns: [t.permitId, t.segmentId] }),
    index('permit_segment_ix').on(t.segmentId),
  ],
)

/** What a permit said at one version; never edited. */
export const permitVersion = mysqlTable(
  'permit_version',
  {
    id: id(),
    permitId: ref('permit_id')
      .notNull()
      .references(() => permit.id),
    version: int('version').notNull(),
    /** See domain/permit-content.ts. */
    content: json('content', z.unknown()).notNull(),
    reason: varchar('reason', { length: 1000 }).notNull().default(''),
    madeBy: ref('made_by')
      .notNull()
      .references(() => person.id),
    madeAt: utc('made_at').notNull(),
  },
  (t) => [uniqueIndex('permit_version_uq').on(t.permitId, t.version)],
)

/** One thing done to a permit. Append-only, kept so by triggers. */
export const permitAct = mysqlTable(
  'permit_act',
  {
    id: id(),
    permitId: ref('permit_id')
      .notNull()
      .references(() => permit.id),
    act: varchar('act', { length: 20, enum: PERMIT_ACTS }).notNull(),
    fromState: varchar('from_state', { length: 12, enum: PERMIT_STATES }).notNull(),
    toState: varchar('to_state', { length: 12, enum: PERMIT_STATES }).notNull(),
    /** The permit's revision and version after it. */
    revision: int('revision').notNull(),
    version: int('version').notNull(),
    /** When it took effect. */
    at: utc('at').notNull(),
    /** When it was written down; later than `at` where the product noticed late. */
    recordedAt: utc('recorded_at').notNull(),
    /** Null when the product did it, because a time had passed. */
    personId: ref('person_id').references(() => person.id),
    reason: varchar('reason', { length: 2000 }).notNull().default(''),
    /** What the act needed besides, see domain/permits.ts. */
    detail: json('detail', z.unknown()),
    signedActId: ref('signed_act_id').references(() => signedAct.id),
  },
  (t) => [uniqueIndex('permit_act_uq').on(t.permitId, t.revision), index('permit_act_at_ix').on(t.at)],
)

/** An isolation point of a permit as it was applied, verified and removed. One row an application of a lock. */
export const isolationPoint = mysqlTable(
  'isolation_point',
  {
    id: id(),
    permitId: ref('permit_id')
      .notNull()
      .references(() => permit.id),
    /** The point's tag in the permit's content. */
    tag: varchar('tag', { length: 20 }).notNull(),
    isolates: varchar('isolates', { length: 200 }).notNull(),
    required: varchar('required', { length: 200 }).notNull(),
    purpose: varchar('purpose', { length: 8, enum: POINT_PURPOSES }).notNull(),
    lockNumber: varchar('lock_number', { length: 20 }).notNull(),
    tagNumber: varchar('tag_number', { length: 20 }).notNull().default(''),
    appliedBy: ref('applied_by')
      .notNull()
      .references(() => person.id),
    appliedAt: utc('applied_at').notNull(),
    /** Who entered the step of somebody without a log-in. */
    appliedWitness: ref('applied_witness').references(() => person.id),
    appliedSignedActId: ref('applied_signed_act_id').references(() => signedAct.id),
    verifiedBy: ref('verified_by').references(() => person.id),
    verifiedAt: utc('verified_at'),
    verifiedWitness: ref('verified_witness').references(() => person.id),
    verifiedSignedActId: ref('verified_signed_act_id').references(() => signedAct.id),
    /** How stored energy was released, and what the try-start or zero-energy check gave. */
    releasedHow: varchar('released_how', { length: 500 }).notNull().default(''),
    zeroEnergy: varchar('zero_energy', { length: 500 }).notNull().default(''),
    removedBy: ref('removed_by').references(() => person.id),
    removedAt: utc('removed_at'),
    removedWitness: ref('removed_witness').references(() => person.id),
    removedHow: varchar('removed_how', { length: 12, enum: LOCK_REMOVALS }),
    removedSignedActId: ref('removed_signed_act_id').references(() => signedAct.id),
    /** The owner-absent procedure in writing, see domain/isolation-locks.ts. */
    removalDetail: json('removal_detail', z.unknown()),
    /** The row of another permit that took the lock over, or that it came from. */
    transferredToId: ref('transferred_to_id'),
    note: varchar('note', { length: 500 }).notNull().default(''),
    revision: int('revision').notNull().default(1),
  },
  (t) => [index('isolation_point_permit_ix').on(t.permitId, t.tag)],
)

/** A box that holds the keys of a permit's locks, and the personal locks of the crew on it. */
export const boxLock = mysqlTable(
  'box_lock',
  {
    id: id(),
    permitId: ref('permit_id')
      .notNull()
      .references(() => permit.id),
    boxCode: varchar('box_code', { length: 20 }).notNull(),
    lockNumber: varchar('lock_number', { length: 20 }).notNull(),
    ownerId: ref('owner_id')
      .notNull()
      .references(() => person.id),
    /** The crew's primary authorised person puts theirs on first and takes it off last. */
    primary: boolean('is_primary').notNull().default(false),
    onAt: utc('on_at').notNull(),
    onWitness: ref('on_witness').references(() => person.id),
    onSignedActId: ref('on_signed_act_id').references(() => signedAct.id),
    offAt: utc('off_at'),
    offBy: ref('off_by').references(() => person.id),
    offWitness: ref('off_witness').references(() => person.id),
    offHow: varchar('off_how', { length: 12, enum: LOCK_REMOVALS }),
    offSignedActId: ref('off_signed_act_id').references(() => signedAct.id),
    removalDetail: json('removal_detail', z.unknown()),
  },
  (t) => [index('box_lock_permit_ix').on(t.permitId)],
)

/** Locks that hang somewhere at this moment: a number stands here once on the whole site. */
export const lockInUse = mysqlTable('lock_in_use', {
  lockNumber: varchar('lock_number', { length: 20 }).primaryKey(),
  permitId: ref('permit_id')
    .notNull()
    .references(() => permit.id),
  pointId: ref('point_id').references(() => isolationPoint.id),
  boxLockId: ref('box_lock_id').references(() => boxLock.id),
  since: utc('since').notNull(),
})

/** A test taken for a permit, before it is accepted or while it is live. */
export const permitTest = mysqlTable(
  'permit_test',
  {
    id: id(),
    permitId: ref('permit_id')
      .notNull()
      .references(() => permit.id),
    kind: varchar('kind', { length: 24, enum: PERMIT_TEST_KINDS }).notNull(),
    place: varchar('place', { length: 200 }).notNull().default(''),
    value: double('value'),
    unit: varchar('unit', { length: 16 }).notNull().default(''),
    passed: boolean('passed').notNull(),
    instrumentSerial: varchar('instrument_serial', { length: 40 }).notNull().default(''),
    calibrationDue: utc('calibration_due'),
    testerId: ref('tester_id')
      .notNull()
      .references(() => person.id),
    witnessId: ref('witness_id').references(() => person.id),
    takenAt: utc('taken_at').notNull(),
    recordedBy: ref('recorded_by')
      .notNull()
      .references(() => person.id),
    recordedAt: utc('recorded_at').notNull(),
    nextDueAt: utc('next_due_at'),
    note: varchar('note', { length: 500 }).notNull().default(''),
  },
  (t) => [index('permit_test_ix').on(t.permitId, t.kind, t.takenAt)],
)

/** A round at a heated segment: what was looked at, felt and measured on the way. */
export const permitRound = mysqlTable(
  'permit_round',
  {
    id: id(),
    permitId: ref('permit_id')
      .notNull()
      .references(() => permit.id),
    at: utc('at').notNull(),
    recordedAt: utc('recorded_at').notNull(),
    personId: ref('person_id')
      .notNull()
      .references(() => person.id),
    hottestC: double('hottest_c'),
    hottestAtM: double('hottest_at_m'),
    inOrder: boolean('in_order').notNull(),
    text: varchar('text', { length: 2000 }).notNull().default(''),
  },
  (t) => [index('permit_round_ix').on(t.permitId, t.at)],
)

/** An officer's ruling on a conflict. It holds for the facts it was given on, and no longer. */
export const permitRuling = mysqlTable(
  'permit_ruling',
  {
    id: id(),
    permitId: ref('permit_id')
      .notNull()
      .references(() => permit.id),
    /** Rule and what it met, for example K3:work:12. */
    conflictKey: varchar('conflict_key', { length: 80 }).notNull(),
    /** The conflict's facts as they were, in words. */
    facts: varchar('facts', { length: 1000 }).notNull(),
    allowed: boolean('allowed').notNull(),
    text: varchar('text', { length: 2000 }).notNull(),
    ruledBy: ref('ruled_by')
      .notNull()
      .references(() => person.id),
    ruledAt: utc('ruled_at').notNull(),
    signedActId: ref('signed_act_id').references(() => signedAct.id),
  },
  (t) => [index('permit_ruling_ix').on(t.permitId, t.conflictKey, t.id)],
)

/** Work by others in the tunnel that a heated segment has to be compared with. */
export const plannedWork = mysqlTable(
  'planned_work',
  {
    id: id(),
    kind: varchar('kind', { length: 20, enum: PLANNED_WORK_KINDS }).notNull(),
    title: varchar('title', { length: 200 }).notNull(),
    lineId: ref('line_id').references(() => line.id),
    segmentId: ref('segment_id').references(() => segment.id),
    fromM: double('from_m'),
    toM: double('to_m'),
    startsAt: utc('starts_at').notNull(),
    endsAt: utc('ends_at').notNull(),
    people: varchar('people', { length: 500 }).notNull().default(''),
    state: varchar('state', { length: 12, enum: PLANNED_WORK_STATES }).notNull(),
    /** What an officer has left of it, and with which barrier. */
    limitedFromM: double('limited_from_m'),
    limitedToM: double('limited_to_m'),
    barrier: varchar('barrier', { length: 500 }).notNull().default(''),
    ruling: varchar('ruling', { length: 2000 }).notNull().default(''),
    ruledBy: ref('ruled_by').references(() => person.id),
    ruledAt: utc('ruled_at'),
    signedActId: ref('signed_act_id').references(() => signedAct.id),
    note: varchar('note', { length: 1000 }).notNull().default(''),
    createdBy: ref('created_by')
      .notNull()
      .references(() => person.id),
    createdAt: utc('created_at').notNull(),
    revision: int('revision').notNull().default(1),
  },
  (t) => [index('planned_work_time_ix').on(t.startsAt, t.endsAt)],
)

/** A competence or licence of a person, as it was entered. A correction replaces a row and never edits it. */
export const competence = mysqlTable(
  'competence',
  {
    id: id(),
    personId: ref('person_id')
      .notNull()
      .references(() => person.id),
    kind: varchar('kind', { length: 24, enum: COMPETENCE_KINDS }).notNull(),
    number: varchar('number', { length: 40 }).notNull().default(''),
    startsAt: utc('starts_at').notNull(),
    /** First instant at which it no longer holds. */
    endsAt: utc('ends_at'),
    enteredBy: ref('entered_by')
      .notNull()
      .references(() => person.id),
    enteredAt: utc('entered_at').notNull(),
    replacedAt: utc('replaced_at'),
    note: varchar('note', { length: 500 }).notNull().default(''),
  },
  (t) => [index('competence_ix').on(t.personId, t.kind)],
)

/** A threshold of law, a standard or the trade as this site has adopted it. */
export const adoptedThreshold = mysqlTable(
  'adopted_threshold',
  {
    id: id(),
    /** See domain/hazard-thresholds.ts. */
    thresholdKey: varchar('threshold_key', { length: 40 }).notNull(),
    value: double('value').notNull(),
    unit: varchar('unit', { length: 16 }).notNull(),
    source: varchar('source', { length: 200 }).notNull(),
    edition: varchar('edition', { length: 80 }).notNull(),
    adoptedBy: ref('adopted_by')
      .notNull()
      .references(() => person.id),
    adoptedAt: utc('adopted_at').notNull(),
    reviewAt: utc('review_at').notNull(),
    endedAt: utc('ended_at'),
    endedBy: ref('ended_by').references(() => person.id),
    reason: varchar('reason', { length: 500 }).notNull(),
    signedActId: ref('signed_act_id').references(() => signedAct.id),
  },
  (t) => [index('adopted_threshold_ix').on(t.thresholdKey, t.adoptedAt)],
)

/** Whether a segment's heating was on, where a person says so instead of a supply's readings. */
export const heatingStatement = mysqlTable(
  'heating_statement',
  {
    id: id(),
    segmentId: ref('segment_id')
      .notNull()
      .references(() => segment.id),
    on: boolean('is_on').notNull(),
    at: utc('at').notNull(),
    supplySetId: ref('supply_set_id').references(() => supplySet.id),
    how: varchar('how', { length: 500 }).notNull(),
    personId: ref('person_id')
      .notNull()
      .references(() => person.id),
    recordedAt: utc('recorded_at').notNull(),
  },
  (t) => [index('heating_statement_ix').on(t.segmentId, t.at)],
)

/** Something that people have to be told at once. Stays open until its cause is gone or the named role has ended it. */
export const safetyEvent = mysqlTable(
  'safety_event',
  {
    id: id(),
    kind: varchar('kind', { length: 30, enum: SAFETY_EVENT_KINDS }).notNull(),
    permitId: ref('permit_id').references(() => permit.id),
    segmentId: ref('segment_id').references(() => segment.id),
    /** One open event an occurrence: a second finding of the same thing is the same event. */
    occurrenceKey: varchar('occurrence_key', { length: 120 }).notNull(),
    startedAt: utc('started_at').notNull(),
    noticedAt: utc('noticed_at').notNull(),
    text: varchar('text', { length: 1000 }).notNull(),
    endedAt: utc('ended_at'),
    endedBy: ref('ended_by').references(() => person.id),
    endReason: varchar('end_reason', { length: 1000 }).notNull().default(''),
    /** Why an officer lets it go on, without ending it. */
    toleratedReason: varchar('tolerated_reason', { length: 1000 }).notNull().default(''),
    toleratedBy: ref('tolerated_by').references(() => person.id),
    toleratedAt: utc('tolerated_at'),
  },
  (t) => [
    uniqueIndex('safety_event_occurrence_uq').on(t.occurrenceKey),
    index('safety_event_open_ix').on(t.endedAt, t.startedAt),
  ],
)

/** A stretch of tunnel that nobody enters until an officer has released it. */
export const bayClosure = mysqlTable(
  'bay_closure',
  {
    id: id(),
    lineId: ref('line_id')
      .notNull()
      .references(() => line.id),
    fromM: double('from_m').notNull(),
    toM: double('to_m').notNull(),
    reason: varchar('reason', { length: 1000 }).notNull(),
    eventId: ref('event_id').references(() => safetyEvent.id),
    closedAt: utc('closed_at').notNull(),
    closedBy: ref('closed_by').references(() => person.id),
    releasedAt: utc('released_at'),
    releasedBy: ref('released_by').references(() => person.id),
    /** Readings that the release rests on. */
    releaseReadings: json('release_readings', z.unknown()),
    releaseReason: varchar('release_reason', { length: 1000 }).notNull().default(''),
    signedActId: ref('signed_act_id').references(() => signedAct.id),
  },
  (t) => [index('bay_closure_open_ix').on(t.releasedAt)],
)

/** A setting of the site that its people may change, with who and why. The newest row of a key holds. */
export const siteSetting = mysqlTable(
  'site_setting',
  {
    id: id(),
    settingKey: varchar('setting_key', { length: 40 }).notNull(),
    value: json('value', z.unknown()).notNull(),
    setBy: ref('set_by').references(() => person.id),
    setAt: utc('set_at').notNull(),
    reason: varchar('reason', { length: 500 }).notNull().default(''),
  },
  (t) => [index('site_setting_ix').on(t.settingKey, t.id)],
)

/** A run that deleted old records by policy: who asked, who agreed, and what it deleted. */
export const retentionRun = mysqlTable('retention_run', {
  id: id(),
  askedBy: ref('asked_by')
    .notNull()
    .references(() => person.id),
  askedAt: utc('asked_at').notNull(),
  agreedBy: ref('agreed_by').references(() => person.id),
  agreedAt: utc('agreed_at'),
  doneAt: utc('done_at'),
  calledOffAt: utc('called_off_at'),
  /** The policy it applied, and the manifest of what it would delete and has deleted. */
  policy: json('policy', z.unknown()).notNull(),
  manifest: json('manifest', z.unknown()).notNull(),
  askSignedActId: ref('ask_signed_act_id').references(() => signedAct.id),
  agreeSignedActId: ref('agree_signed_act_id').references(() => signedAct.id),
  revision: int('revision').notNull().default(1),
})
