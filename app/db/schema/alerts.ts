import {
  boolean,
  double,
  index,
  int,
  mysqlTable,
  primaryKey,
  text,
  uniqueIndex,
  varchar,
} from 'drizzle-orm/mysql-core'
import { z } from 'zod'
import {
  ALERT_ACTS,
  ALERT_CONDITIONS,
  ALERT_PRIORITIES,
  ALERT_STATES,
  LADDER_STEPS,
  MAIL_KINDS,
  MAIL_STATES,
  SHELF_REASONS,
} from '../../domain/alert-words.ts'
import { id, json, ref, utc } from '../columns.ts'
import { person } from './people.ts'
import { permit, safetyEvent } from './permits.ts'
import { position, segment, source } from './register.ts'
import { signedAct } from './shared.ts'

/** A rule that raises alerts. What it says is in its versions; the newest holds from its date on. */
export const alertRule = mysqlTable(
  'alert_rule',
  {
    id: id(),
    code: varchar('code', { length: 40 }).notNull(),
    condition: varchar('alert_condition', { length: 24, enum: ALERT_CONDITIONS }).notNull(),
    /** False until somebody has switched it on, with the four sentences in place. */
    enabled: boolean('enabled').notNull().default(false),
    version: int('version').notNull().default(1),
    createdBy: ref('created_by').references(() => person.id),
    createdAt: utc('created_at').notNull(),
    revision: int('revision').notNull().default(1),
  },
  (t) => [uniqueIndex('alert_rule_code_uq').on(t.code)],
)

/** One version of a rule; never edited. */
export const alertRuleVersion = mysqlTable(
  'alert_rule_version',
  {
    id: id(),
    ruleId: ref('rule_id')
      .notNull()
      .references(() => alertRule.id),
    version: int('version').notNull(),
    /** See domain/alert-rules.ts: scope, limits, deadband, delays, coverage, priority, suppression, the four sentences. */
    content: json('content', z.unknown()).notNull(),
    startsAt: utc('starts_at').notNull(),
    reason: varchar('reason', { length: 1000 }).notNull(),
    madeBy: ref('made_by').references(() => person.id),
    madeAt: utc('made_at').notNull(),
  },
  (t) => [uniqueIndex('alert_rule_version_uq').on(t.ruleId, t.version)],
)

/** How far a rule has looked at one thing, and what it has to remember to go on from there. */
export const alertWatch = mysqlTable(
  'alert_watch',
  {
    ruleId: ref('rule_id')
      .notNull()
      .references(() => alertRule.id),
    /** Segment, position, source or permit by kind and id, for example position:12. */
    subject: varchar('subject', { length: 40 }).notNull(),
    lookedUntil: utc('looked_until').notNull(),
    memory: json('memory', z.unknown()).notNull(),
    evaluable: boolean('evaluable').notNull(),
    /** Why it could not be judged. */
    why: varchar('why', { length: 300 }).notNull().default(''),
    /** From where it has to look again, because data before lookedUntil came late, were withdrawn or corrected. */
    againFrom: utc('again_from'),
    revision: int('revision').notNull().default(1),
  },
  (t) => [primaryKey({ name: 'alert_watch_pk', columns: [t.ruleId, t.subject] })],
)

/** One occurrence: from its raising to its end. */
export const alert = mysqlTable(
  'alert',
  {
    id: id(),
    ruleId: ref('rule_id').references(() => alertRule.id),
    ruleVersion: int('rule_version'),
    condition: varchar('alert_condition', { length: 24, enum: ALERT_CONDITIONS }).notNull(),
    priority: varchar('priority', { length: 8, enum: ALERT_PRIORITIES }).notNull(),
    state: varchar('state', { length: 16, enum: ALERT_STATES }).notNull(),
    /** Rule, subject and occurrence: a second finding of the same thing is the same alert. */
    occurrenceKey: varchar('occurrence_key', { length: 160 }).notNull(),
    segmentId: ref('segment_id').references(() => segment.id),
    positionId: ref('position_id').references(() => position.id),
    sourceId: ref('source_id').references(() => source.id),
    permitId: ref('permit_id').references(() => permit.id),
    safetyEventId: ref('safety_event_id').references(() => safetyEvent.id),
    /** What and how bad, as the subject of a mail says it. */
    title: varchar('title', { length: 200 }).notNull(),
    detail: json('detail', z.unknown()),
    value: double('value'),
    limitValue: double('limit_value'),
    unit: varchar('unit', { length: 16 }).notNull().default(''),
    /** In the data; and when we learned it. */
    startedAt: utc('started_at').notNull(),
    noticedAt: utc('noticed_at').notNull(),
    clearedAt: utc('cleared_at'),
    clearNoticedAt: utc('clear_noticed_at'),
    /** Stays until the named role resets it, also when its cause is gone. */
    latching: boolean('latching').notNull().default(false),
    ownerId: ref('owner_id').references(() => person.id),
    ownedAt: utc('owned_at'),
    /** To whom the owner offers it; theirs once they accept. */
    offeredTo: ref('offered_to').references(() => person.id),
    escalatedStep: int('escalated_step').notNull().default(0),
    nextEscalationAt: utc('next_escalation_at'),
    endedAt: utc('ended_at'),
    revision: int('revision').notNull().default(1),
  },
  (t) => [
    uniqueIndex('alert_occurrence_uq').on(t.occurrenceKey),
    index('alert_state_ix').on(t.state, t.priority, t.startedAt),
    index('alert_segment_ix').on(t.segmentId, t.startedAt),
    index('alert_noticed_ix').on(t.noticedAt),
    index('alert_escalation_ix').on(t.nextEscalationAt),
  ],
)

/** What happened to an alert, in order. */
export const alertAct = mysqlTable(
  'alert_act',
  {
    id: id(),
    alertId: ref('alert_id')
      .notNull()
      .references(() => alert.id),
    act: varchar('act', { length: 12, enum: ALERT_ACTS }).notNull(),
    at: utc('at').notNull(),
    recordedAt: utc('recorded_at').notNull(),
    /** Null when the product did it. */
    personId: ref('person_id').references(() => person.id),
    text: varchar('text', { length: 1000 }).notNull().default(''),
    detail: json('detail', z.unknown()),
    signedActId: ref('signed_act_id').references(() => signedAct.id),
  },
  (t) => [index('alert_act_ix').on(t.alertId, t.id)],
)

/** An alert put aside for a while by a person. */
export const alertShelf = mysqlTable(
  'alert_shelf',
  {
    id: id(),
    alertId: ref('alert_id')
      .notNull()
      .references(() => alert.id),
    reason: varchar('reason', { length: 20, enum: SHELF_REASONS }).notNull(),
    text: varchar('text', { length: 500 }).notNull(),
    shelvedBy: ref('shelved_by')
      .notNull()
      .references(() => person.id),
    fromAt: utc('from_at').notNull(),
    untilAt: utc('until_at').notNull(),
    endedAt: utc('ended_at'),
    endedBy: ref('ended_by').references(() => person.id),
  },
  (t) => [index('alert_shelf_ix').on(t.alertId, t.untilAt)],
)

/** A rule, or one thing of it, taken out of service for work, with a date to look again. */
export const alertOutOfService = mysqlTable(
  'alert_out_of_service',
  {
    id: id(),
    ruleId: ref('rule_id')
      .notNull()
      .references(() => alertRule.id),
    /** Empty for all that the rule watches. */
    subject: varchar('subject', { length: 40 }).notNull().default(''),
    workReference: varchar('work_reference', { length: 120 }).notNull(),
    reason: varchar('reason', { length: 500 }).notNull(),
    setBy: ref('set_by')
      .notNull()
      .references(() => person.id),
    setAt: utc('set_at').notNull(),
    reviewAt: utc('review_at').notNull(),
    endedAt: utc('ended_at'),
    endedBy: ref('ended_by').references(() => person.id),
  },
  (t) => [index('alert_out_of_service_ix').on(t.ruleId, t.endedAt)],
)

/** Who stands on which step of the ladder, from when until when. */
export const onCallDuty = mysqlTable(
  'on_call_duty',
  {
    id: id(),
    step: varchar('step', { length: 16, enum: LADDER_STEPS }).notNull(),
    personId: ref('person_id')
      .notNull()
      .references(() => person.id),
    fromAt: utc('from_at').notNull(),
    untilAt: utc('until_at').notNull(),
    setBy: ref('set_by').references(() => person.id),
    setAt: utc('set_at').notNull(),
    replacedAt: utc('replaced_at'),
  },
  (t) => [index('on_call_duty_ix').on(t.step, t.fromAt)],
)

/** A mail to be sent or sent. Written in the transaction of what it tells; times to send are the machine's. */
export const mailOutbox = mysqlTable(
  'mail_outbox',
  {
    id: id(),
    /** Fixed here, so that a repeat after a crash can be known as one. */
    messageId: varchar('message_id', { length: 160 }).notNull(),
    kind: varchar('kind', { length: 12, enum: MAIL_KINDS }).notNull(),
    priority: varchar('priority', { length: 8, enum: ALERT_PRIORITIES }).notNull(),
    state: varchar('state', { length: 8, enum: MAIL_STATES }).notNull(),
    personId: ref('person_id').references(() => person.id),
    address: varchar('address', { length: 254 }).notNull(),
    alertId: ref('alert_id').references(() => alert.id),
    /** First mail of the occurrence, for threads. */
    threadId: varchar('thread_id', { length: 160 }).notNull().default(''),
    /** Mails with one key that wait together become one. */
    groupKey: varchar('group_key', { length: 80 }).notNull().default(''),
    subject: varchar('subject', { length: 300 }).notNull(),
    text: text('text_body').notNull(),
    html: text('html_body').notNull(),
    /** Further headers by name. */
    headers: json('headers', z.record(z.string(), z.string())).notNull(),
    /** Of the product: what it tells and when that was. */
    createdAt: utc('created_at').notNull(),
    sendAt: utc('send_at').notNull(),
    attempts: int('attempts').notNull().default(0),
    leaseOwner: varchar('lease_owner', { length: 64 }),
    leaseUntil: utc('lease_until'),
    sentAt: utc('sent_at'),
    lastAnswer: varchar('last_answer', { length: 500 }).notNull().default(''),
    /** The mail that tells this one's matter instead. */
    foldedInto: ref('folded_into'),
  },
  (t) => [
    uniqueIndex('mail_outbox_message_uq').on(t.messageId),
    index('mail_outbox_due_ix').on(t.state, t.sendAt, t.id),
    index('mail_outbox_lease_ix').on(t.state, t.leaseUntil),
    index('mail_outbox_group_ix').on(t.groupKey, t.state),
    index('mail_outbox_person_ix').on(t.personId, t.createdAt),
    index('mail_outbox_alert_ix').on(t.alertId),
  ],
)

/** One try to hand a mail to the mail server, and what it said. */
export const mailAttempt = mysqlTable(
  'mail_attempt',
  {
    id: id(),
    outboxId: ref('outbox_id')
      .notNull()
      .references(() => mailOutbox.id),
    at: utc('at').notNull(),
    owner: varchar('owner', { length: 64 }).notNull(),
    accepted: boolean('accepted').notNull(),
    answer: varchar('answer', { length: 500 }).notNull(),
    tookMs: int('took_ms').notNull(),
  },
  (t) => [index('mail_attempt_ix').on(t.outboxId, t.id)],
)

/** A delivery-status notification that came back for a mail. */
export const mailBounce = mysqlTable(
  'mail_bounce',
  {
    id: id(),
    outboxId: ref('outbox_id').references(() => mailOutbox.id),
    personId: ref('person_id').references(() => person.id),
    address: varchar('address', { length: 254 }).notNull(),
    at: utc('at').notNull(),
    action: varchar('action', { length: 20 }).notNull(),
    status: varchar('status', { length: 20 }).notNull(),
    diagnostic: varchar('diagnostic', { length: 500 }).notNull().default(''),
  },
  (t) => [index('mail_bounce_address_ix').on(t.address, t.at)],
)

/** What a person wants of the mail, within what duty allows. */
export const mailPreference = mysqlTable('mail_preference', {
  personId: ref('person_id')
    .primaryKey()
    .references(() => person.id),
  /** Site time of day HH:MM between which medium and low ones wait; empty for never. */
  quietFrom: varchar('quiet_from', { length: 5 }).notNull().default(''),
  quietUntil: varchar('quiet_until', { length: 5 }).notNull().default(''),
  digest: boolean('digest').notNull().default(true),
  lowToDigest: boolean('low_to_digest').notNull().default(true),
  /** Sound on an open page for the highest alerts. */
  sound: boolean('sound').notNull().default(false),
  updatedAt: utc('updated_at').notNull(),
})

/** A digest that was due, made once: also when it was empty and not sent. */
export const digestRun = mysqlTable(
  'digest_run',
  {
    id: id(),
    /** Site date, YYYY-MM-DD. */
    day: varchar('day', { length: 10 }).notNull(),
    kind: varchar('kind', { length: 20 }).notNull(),
    madeAt: utc('made_at').notNull(),
    sent: int('sent').notNull(),
    content: json('content', z.unknown()).notNull(),
  },
  (t) => [uniqueIndex('digest_run_uq').on(t.day, t.kind)],
)
