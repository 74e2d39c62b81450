/**
 * Thresholds as this site adopts them: an officer adopts, replaces or ends one, each time signed and with a reason. The
 * old rows stay; the newest that nobody has ended holds until its review date.
 */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { insertSetting, newestSetting } from '../db/queries/site-settings.server.ts'
import {
  type AdoptedRow,
  endAdoption,
  insertAdoption,
  listAdoptions,
  lockThresholds,
} from '../db/queries/thresholds.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand, may } from '../domain/actor.ts'
import { BAY_KEY, type BayVolume, bayVolumeOf } from '../domain/bay-volume.ts'
import { DomainError } from '../domain/errors.ts'
import {
  type AdoptedThreshold,
  isThresholdKey,
  THRESHOLDS,
  type ThresholdKey,
  thresholdStanding,
} from '../domain/hazard-thresholds.ts'
import type { BayVolumeForm, ThresholdAdoption, ThresholdEnd } from '../domain/schemas/threshold.ts'
import { writeRecord } from './record.server.ts'
import { signAct, useSignedAct } from './signature.server.ts'

const DAY_MS = 86_400_000
/** Nothing is adopted for longer than this without another look, days. */
const LONGEST_REVIEW_DAYS = 5 * 366

/** A row of the table; one of a threshold that the catalogue has dropped is passed over. */
function adoptionOf(row: AdoptedRow): AdoptedThreshold[] {
  return isThresholdKey(row.key) ? [{ ...row, key: row.key }] : []
}

/** Adoptions that nobody has ended, one a threshold, lapsed ones among them. */
export async function openAdoptions(db: DbOrTx): Promise<AdoptedThreshold[]> {
  return (await listAdoptions(db, { openOnly: true })).flatMap(adoptionOf)
}

/** The value that a threshold has here at an instant; null where it is not set or has lapsed. */
export async function adoptedValue(db: DbOrTx, key: ThresholdKey, now: Date): Promise<number | null> {
  const [open] = (await listAdoptions(db, { key, openOnly: true })).flatMap(adoptionOf)
  return open !== undefined && thresholdStanding(open, now) === 'in-force' ? open.value : null
}

export interface ThresholdsPageData {
  open: AdoptedThreshold[]
  /** Every adoption, the newest first. */
  history: AdoptedThreshold[]
  bay: BayVolume
  mayAdopt: boolean
}

/** What the page of thresholds shows. @throws DomainError forbidden */
export async function readThresholdsPage(db: Db, actor: Actor): Promise<ThresholdsPageData> {
  demand(actor, 'facility:view')
  const history = (await listAdoptions(db)).flatMap(adoptionOf)
  return {
    open: history.filter(({ endedAt }) => endedAt === null),
    history,
    bay: await readBayVolume(db),
    mayAdopt: may(actor, 'threshold:adopt'),
  }
}

const overtaken = (): DomainError =>
  new DomainError(
    'conflict',
    'Somebody has changed this since your page was made. Nothing has been saved: look at what holds now, and do it again if you still want to.',
  )

function signedSubject(meaning: string, subjectId: string) {
  return { meaning, subjectKind: 'threshold', subjectId }
}

/**
 * Adopts a value, in place of the one that held before.
 *
 * @returns the adoption's id
 * @throws DomainError forbidden, bad-input (review date), signature-refused, conflict (changed since the page was made)
 */
export async function adoptThreshold(
  db: Db,
  actor: Actor,
  now: Date,
  form: ThresholdAdoption,
): Promise<number> {
  demand(actor, 'threshold:adopt')
  requireReview(form.reviewAt, now)
  const subject = signedSubject('adopt a threshold for this site', form.key)
  const signed = await signAct(db, { actor, password: form.password, now, ...subject })
  return tx(db, async (inside) => {
    const before = await lockedOpen(inside, form)
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    if (before !== null) await endAdoption(inside, before.id, { endedAt: now, endedBy: actor.personId })
    const { unit } = THRESHOLDS[form.key]
    const value = {
      value: form.value,
      unit,
      source: form.source,
      edition: form.edition,
      reviewAt: form.reviewAt,
    }
    const id = await insertAdoption(inside, {
      thresholdKey: form.key,
      ...value,
      adoptedBy: actor.personId,
      adoptedAt: now,
      reason: form.reason,
      signedActId: act.id,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'threshold adopted',
      subjectKind: 'threshold',
      subjectId: form.key,
      before: before === null ? null : valuesOf(before),
      after: value,
      reason: form.reason,
      signedActId: act.id,
    })
    return id
  })
}

/**
 * Ends an adoption: from now on the threshold is not set.
 *
 * @throws DomainError forbidden, signature-refused, conflict (changed since the page was made), not-acceptable-now
 *   (nothing is adopted)
 */
export async function endThreshold(db: Db, actor: Actor, now: Date, form: ThresholdEnd): Promise<void> {
  demand(actor, 'threshold:adopt')
  const subject = signedSubject('end a threshold of this site', form.key)
  const signed = await signAct(db, { actor, password: form.password, now, ...subject })
  await tx(db, async (inside) => {
    const before = await lockedOpen(inside, form)
    if (before === null) {
      throw new DomainError(
        'not-acceptable-now',
        `“${THRESHOLDS[form.key].label}” is not set by the site, so there is nothing to end.`,
      )
    }
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    await endAdoption(inside, before.id, { endedAt: now, endedBy: actor.personId })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'threshold ended',
      subjectKind: 'threshold',
      subjectId: form.key,
      before: valuesOf(before),
      after: null,
      reason: form.reason,
      signedActId: act.id,
    })
  })
}

/** The open adoption of a threshold, which must be the one that the page showed. */
async function lockedOpen(
  inside: DbOrTx,
  form: { key: ThresholdKey; seen: number },
): Promise<AdoptedRow | null> {
  await lockThresholds(inside)
  const [open = null] = await listAdoptions(inside, { key: form.key, openOnly: true })
  if ((open?.id ?? 0) !== form.seen) throw overtaken()
  return open
}

function valuesOf({ value, unit, source, edition, reviewAt }: AdoptedRow) {
  return { value, unit, source, edition, reviewAt }
}

function requireReview(reviewAt: Date, now: Date): void {
  const days = (reviewAt.getTime() - now.getTime()) / DAY_MS
  if (days > 0 && days <= LONGEST_REVIEW_DAYS) return
  throw new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
    fields: {
      reviewAt: [
        days <= 0
          ? 'This lies in the past: the value would have lapsed at once. Give a day to come.'
          : 'This is more than five years ahead. Give a day on which somebody will look at it again before that.',
      ],
    },
  })
}

/** The space that vented gas would mix into, and where its size is taken from. */
export async function readBayVolume(db: DbOrTx): Promise<BayVolume> {
  return bayVolumeOf(await newestSetting(db, BAY_KEY))
}

/**
 * Sets the size of a bay, signed.
 *
 * @throws DomainError forbidden, signature-refused, conflict (somebody has set it since the page was made)
 */
export async function setBayVolume(db: Db, actor: Actor, now: Date, form: BayVolumeForm): Promise<void> {
  demand(actor, 'threshold:adopt')
  const subject = { meaning: 'set the size of a bay', subjectKind: 'site-setting', subjectId: BAY_KEY }
  const signed = await signAct(db, { actor, password: form.password, now, ...subject })
  await tx(db, async (inside) => {
    const before = bayVolumeOf(await newestSetting(inside, BAY_KEY, { lock: true }))
    if (before.settingId !== form.seen) throw overtaken()
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    const value = { volumeM3: form.volumeM3 }
    await insertSetting(inside, {
      settingKey: BAY_KEY,
      value,
      setBy: actor.personId,
      setAt: now,
      reason: form.reason,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'bay size set',
      subjectKind: subject.subjectKind,
      subjectId: BAY_KEY,
      before: { volumeM3: before.volumeM3 },
      after: value,
      reason: form.reason,
      signedActId: act.id,
    })
  })
}
