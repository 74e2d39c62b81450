import { and, asc, desc, eq, gt, inArray, lte, ne, sql } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import {
  alert,
  alertAct,
  alertRuleVersion,
  mailAttempt,
  mailBounce,
  mailOutbox,
  mailPreference,
  permit,
  person,
  position,
  segment,
  site,
  source,
} from '../schema/index.ts'

export type MailRow = typeof mailOutbox.$inferSelect
export type NewMailRow = typeof mailOutbox.$inferInsert

export async function insertMail(tx: DbOrTx, row: NewMailRow): Promise<number> {
  const [result] = await tx.insert(mailOutbox).values(row)
  return result.insertId
}

export async function findMailByMessageId(db: DbOrTx, messageId: string): Promise<MailRow | null> {
  const rows = await db.select().from(mailOutbox).where(eq(mailOutbox.messageId, messageId))
  return rows[0] ?? null
}

/** The mails about one alert, in the order in which they were written. */
export async function listMailsOfAlert(
  db: DbOrTx,
  alertId: number,
): Promise<
  Pick<MailRow, 'id' | 'messageId' | 'kind' | 'personId' | 'state' | 'foldedInto' | 'lastAnswer'>[]
> {
  return db
    .select({
      id: mailOutbox.id,
      messageId: mailOutbox.messageId,
      kind: mailOutbox.kind,
      personId: mailOutbox.personId,
      state: mailOutbox.state,
      foldedInto: mailOutbox.foldedInto,
      lastAnswer: mailOutbox.lastAnswer,
    })
    .from(mailOutbox)
    .where(eq(mailOutbox.alertId, alertId))
    .orderBy(asc(mailOutbox.id))
}

/** When the first waiting mail of a person's group goes; null when none waits. */
export async function findGroupTime(db: DbOrTx, personId: number, groupKey: string): Promise<Date | null> {
  const rows = await db
    .select({ sendAt: mailOutbox.sendAt })
    .from(mailOutbox)
    .where(
      and(
        eq(mailOutbox.groupKey, groupKey),
        eq(mailOutbox.state, 'waiting'),
        eq(mailOutbox.personId, personId),
        eq(mailOutbox.attempts, 0),
      ),
    )
    .orderBy(asc(mailOutbox.sendAt))
    .limit(1)
  return rows[0]?.sendAt ?? null
}

/** Holds back every other worker that wants to take mails, until this transaction ends. */
export async function lockClaims(tx: DbOrTx): Promise<void> {
  await tx.select({ id: site.id }).from(site).orderBy(asc(site.id)).limit(1).for('update')
}

/** Locks mails whose time has come, passing over those that somebody else has locked. */
export async function lockDueMails(
  tx: DbOrTx,
  machine: Date,
  most: number,
  onlyHighest = false,
): Promise<MailRow[]> {
  return tx
    .select()
    .from(mailOutbox)
    .where(
      and(
        eq(mailOutbox.state, 'waiting'),
        lte(mailOutbox.sendAt, machine),
        onlyHighest ? eq(mailOutbox.priority, 'highest') : undefined,
      ),
    )
    .orderBy(asc(mailOutbox.sendAt), asc(mailOutbox.id))
    .limit(most)
    .for('update', { skipLocked: true })
}

/** Locks mails whose worker has gone silent. */
export async function lockAbandonedMails(tx: DbOrTx, machine: Date, most: number): Promise<MailRow[]> {
  return tx
    .select()
    .from(mailOutbox)
    .where(and(eq(mailOutbox.state, 'sending'), lte(mailOutbox.leaseUntil, machine)))
    .orderBy(asc(mailOutbox.leaseUntil), asc(mailOutbox.id))
    .limit(most)
    .for('update', { skipLocked: true })
}

/** Locks what waits for these people in these groups and has not been tried yet. */
export async function lockCompany(
  tx: DbOrTx,
  personIds: number[],
  groupKeys: string[],
  until: Date,
): Promise<MailRow[]> {
  if (personIds.length === 0) return []
  return tx
    .select()
    .from(mailOutbox)
    .where(
      and(
        inArray(mailOutbox.personId, personIds),
        inArray(mailOutbox.groupKey, groupKeys),
        eq(mailOutbox.state, 'waiting'),
        eq(mailOutbox.attempts, 0),
        ne(mailOutbox.priority, 'highest'),
        lte(mailOutbox.sendAt, until),
      ),
    )
    .orderBy(asc(mailOutbox.id))
    .for('update', { skipLocked: true })
}

/** When mails about alerts, and summaries, went out to people after an instant. */
export async function listGone(
  tx: DbOrTx,
  personIds: number[],
  since: Date,
): Promise<{ personId: number | null; kind: MailRow['kind']; at: Date }[]> {
  return tx
    .select({ personId: mailOutbox.personId, kind: mailOutbox.kind, at: mailOutbox.sendAt })
    .from(mailOutbox)
    .where(
      and(
        inArray(mailOutbox.personId, personIds),
        inArray(mailOutbox.state, ['sending', 'sent']),
        inArray(mailOutbox.kind, ['alert', 'escalation', 'clear', 'summary']),
        gt(mailOutbox.sendAt, since),
      ),
    )
}

/** Locks the summary that still waits for a person; null when none does. */
export async function lockWaitingSummary(tx: DbOrTx, personId: number): Promise<MailRow | null> {
  const rows = await tx
    .select()
    .from(mailOutbox)
    .where(
      and(
        eq(mailOutbox.personId, personId),
        eq(mailOutbox.kind, 'summary'),
        eq(mailOutbox.state, 'waiting'),
        eq(mailOutbox.attempts, 0),
      ),
    )
    .orderBy(asc(mailOutbox.id))
    .limit(1)
    .for('update')
  return rows[0] ?? null
}

/** What a mail tells instead of others. */
export async function listFolded(tx: DbOrTx, intoId: number): Promise<MailRow[]> {
  return tx.select().from(mailOutbox).where(eq(mailOutbox.foldedInto, intoId)).orderBy(asc(mailOutbox.id))
}

export async function foldMails(tx: DbOrTx, ids: number[], intoId: number): Promise<void> {
  if (ids.length === 0) return
  await tx
    .update(mailOutbox)
    .set({ state: 'folded', foldedInto: intoId, leaseOwner: null, leaseUntil: null })
    .where(inArray(mailOutbox.id, ids))
}

export async function updateMail(
  tx: DbOrTx,
  id: number,
  change: Partial<
    Pick<MailRow, 'subject' | 'text' | 'html' | 'priority' | 'state' | 'sendAt' | 'lastAnswer'>
  >,
): Promise<void> {
  await tx.update(mailOutbox).set(change).where(eq(mailOutbox.id, id))
}

export async function leaseMails(
  tx: DbOrTx,
  ids: number[],
  lease: { leaseOwner: string; leaseUntil: Date; machine: Date },
): Promise<void> {
  if (ids.length === 0) return
  await tx
    .update(mailOutbox)
    .set({
      state: 'sending',
      leaseOwner: lease.leaseOwner,
      leaseUntil: lease.leaseUntil,
      sendAt: lease.machine,
      attempts: sql`${mailOutbox.attempts} + 1`,
    })
    .where(inArray(mailOutbox.id, ids))
}

/** Keeps a worker's mails its own; returns how many still are. */
export async function renewLease(db: DbOrTx, leaseOwner: string, leaseUntil: Date): Promise<number> {
  const [result] = await db
    .update(mailOutbox)
    .set({ leaseUntil })
    .where(and(eq(mailOutbox.state, 'sending'), eq(mailOutbox.leaseOwner, leaseOwner)))
  return result.affectedRows
}

/** Gives back mails that were taken and not tried. */
export async function releaseMails(
  db: DbOrTx,
  leaseOwner: string,
  ids: number[],
  sendAt: Date,
): Promise<void> {
  if (ids.length === 0) return
  await db
    .update(mailOutbox)
    .set({
      state: 'waiting',
      leaseOwner: null,
      leaseUntil: null,
      sendAt,
      attempts: sql`${mailOutbox.attempts} - 1`,
    })
    .where(and(inArray(mailOutbox.id, ids), heldBy(leaseOwner)))
}

function heldBy(leaseOwner: string) {
  return and(eq(mailOutbox.state, 'sending'), eq(mailOutbox.leaseOwner, leaseOwner))
}

/** Marks mails as accepted by the mail server, those still held by this worker. */
export async function markSent(
  tx: DbOrTx,
  leaseOwner: string,
  sent: { id: number; answer: string }[],
  machine: Date,
): Promise<void> {
  if (sent.length === 0) return
  const answers = sent.map(({ id, answer }) => sql`WHEN ${id} THEN ${answer}`)
  await tx
    .update(mailOutbox)
    .set({
      state: 'sent',
      sentAt: machine,
      leaseOwner: null,
      leaseUntil: null,
      lastAnswer: sql`CASE ${mailOutbox.id} ${sql.join(answers, sql` `)} ELSE ${mailOutbox.lastAnswer} END`,
    })
    .where(
      and(
        inArray(
          mailOutbox.id,
          sent.map(({ id }) => id),
        ),
        heldBy(leaseOwner),
      ),
    )
}

/** Notes a failed try of a mail that is still held; false when it is not. */
export async function markFailed(
  tx: DbOrTx,
  leaseOwner: string,
  id: number,
  change: Pick<MailRow, 'state' | 'lastAnswer' | 'sendAt'>,
): Promise<boolean> {
  const [result] = await tx
    .update(mailOutbox)
    .set({ ...change, leaseOwner: null, leaseUntil: null })
    .where(and(eq(mailOutbox.id, id), heldBy(leaseOwner)))
  return result.affectedRows === 1
}

export async function insertAttempts(tx: DbOrTx, rows: (typeof mailAttempt.$inferInsert)[]): Promise<void> {
  if (rows.length > 0) await tx.insert(mailAttempt).values(rows)
}

export async function insertBounce(tx: DbOrTx, row: typeof mailBounce.$inferInsert): Promise<void> {
  await tx.insert(mailBounce).values(row)
}

/** Bounces of an address after an instant, oldest first. */
export async function listBounces(
  db: DbOrTx,
  address: string,
  since: Date,
): Promise<{ outboxId: number | null; at: Date; action: string; status: string }[]> {
  return db
    .select({
      outboxId: mailBounce.outboxId,
      at: mailBounce.at,
      action: mailBounce.action,
      status: mailBounce.status,
    })
    .from(mailBounce)
    .where(and(eq(mailBounce.address, address), gt(mailBounce.at, since)))
    .orderBy(asc(mailBounce.at), asc(mailBounce.id))
}

/** The next rung of the ladder is called now for what nobody has taken and this person was told of. */
export async function escalateAlertsTold(tx: DbOrTx, personId: number, now: Date): Promise<void> {
  await tx
    .update(alert)
    .set({ nextEscalationAt: now, revision: sql`${alert.revision} + 1` })
    .where(
      and(
        eq(alert.state, 'active'),
        gt(alert.nextEscalationAt, now),
        inArray(
          alert.id,
          tx
            .select({ id: mailOutbox.alertId })
            .from(mailOutbox)
            .where(and(eq(mailOutbox.personId, personId), inArray(mailOutbox.kind, ['alert', 'escalation']))),
        ),
      ),
    )
}

export async function findQuietHours(
  db: DbOrTx,
  personId: number,
): Promise<{ from: string; until: string } | null> {
  const rows = await db
    .select({ from: mailPreference.quietFrom, until: mailPreference.quietUntil })
    .from(mailPreference)
    .where(eq(mailPreference.personId, personId))
  return rows[0] ?? null
}

export async function listAddressees(
  db: DbOrTx,
  personIds: number[],
): Promise<{ personId: number; address: string | null }[]> {
  if (personIds.length === 0) return []
  return db
    .select({ personId: person.id, address: person.email })
    .from(person)
    .where(inArray(person.id, personIds))
    .orderBy(asc(person.id))
}

/** An alert with the names a mail about it needs. */
export async function findAlertForMail(db: DbOrTx, alertId: number) {
  const rows = await db
    .select({
      alert,
      segmentTag: segment.tag,
      positionTag: position.tag,
      sourceCode: source.code,
      permitNumber: permit.number,
      ownerName: person.name,
      ruleContent: alertRuleVersion.content,
    })
    .from(alert)
    .leftJoin(segment, eq(segment.id, alert.segmentId))
    .leftJoin(position, eq(position.id, alert.positionId))
    .leftJoin(source, eq(source.id, alert.sourceId))
    .leftJoin(permit, eq(permit.id, alert.permitId))
    .leftJoin(person, eq(person.id, alert.ownerId))
    .leftJoin(
      alertRuleVersion,
      and(eq(alertRuleVersion.ruleId, alert.ruleId), eq(alertRuleVersion.version, alert.ruleVersion)),
    )
    .where(eq(alert.id, alertId))
    .orderBy(desc(alert.id))
    .limit(1)
  return rows[0] ?? null
}

const undeliveredKey = (address: string) => `mail-undelivered:${address.slice(0, 110)}:`

/** The alert about an address that still stands; null when none does. */
export async function findOpenUndelivered(tx: DbOrTx, address: string): Promise<number | null> {
  const rows = await tx
    .select({ id: alert.id })
    .from(alert)
    .where(
      and(
        eq(alert.condition, 'mail-undelivered'),
        inArray(alert.state, ['active', 'owned']),
        sql`LOCATE(${undeliveredKey(address)}, ${alert.occurrenceKey}) = 1`,
      ),
    )
    .limit(1)
  return rows[0]?.id ?? null
}

export async function insertUndelivered(
  tx: DbOrTx,
  found: { address: string; outboxId: number; title: string; detail: unknown; text: string; at: Date },
): Promise<number> {
  const [result] = await tx.insert(alert).values({
    condition: 'mail-undelivered',
    priority: 'medium',
    state: 'active',
    occurrenceKey: `${undeliveredKey(found.address)}${found.outboxId}`,
    title: found.title,
    detail: found.detail,
    startedAt: found.at,
    noticedAt: found.at,
  })
  await tx.insert(alertAct).values({
    alertId: result.insertId,
    act: 'raise',
    at: found.at,
    recordedAt: found.at,
    text: found.text,
    detail: null,
  })
  return result.insertId
}

export async function saveUnsubscribed(
  db: DbOrTx,
  personId: number,
  change: { digest: boolean } | { lowToDigest: boolean },
  updatedAt: Date,
): Promise<void> {
  await db
    .insert(mailPreference)
    .values({ personId, ...change, updatedAt })
    .onDuplicateKeyUpdate({ set: { ...change, updatedAt } })
}
