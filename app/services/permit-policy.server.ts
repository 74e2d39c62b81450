/** What the site has decided about permits: whether a window may be extended, and how long records are kept. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  insertSetting,
  listSettings,
  newestSetting,
  type SettingRow,
} from '../db/queries/site-settings.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import type { PermitPolicy } from '../domain/permit-facts.ts'
import { DEFAULT_PERMIT_POLICY, PermitPolicySchema } from '../domain/permit-policy.ts'
import type { PolicyForm } from '../domain/schemas/permit-policy.ts'
import { writeRecord } from './record.server.ts'
import { signAct, useSignedAct } from './signature.server.ts'

const KEY = 'permit-policy'
const SHOWN = 20
const SIGNED = {
  meaning: 'set what holds for permits at this site',
  subjectKind: 'site-setting',
  subjectId: KEY,
}

/** What holds now; the product's proposal until an officer has set something. */
export async function readPermitPolicy(db: DbOrTx): Promise<PermitPolicy> {
  const row = await newestSetting(db, KEY)
  return row === null ? DEFAULT_PERMIT_POLICY : PermitPolicySchema.parse(row.value)
}

export interface PolicyEntry extends PermitPolicy {
  id: number
  by: string | null
  at: Date
  reason: string
}

/** What has held since when, the newest first. */
export async function listPermitPolicies(db: DbOrTx): Promise<PolicyEntry[]> {
  const rows = await listSettings(db, KEY, SHOWN)
  return rows.map(({ value, ...row }: SettingRow) => ({ ...row, ...PermitPolicySchema.parse(value) }))
}

/**
 * Sets the policy, signed.
 *
 * @throws DomainError forbidden, signature-refused, conflict (somebody has set it since the page was made)
 */
export async function setPermitPolicy(db: Db, actor: Actor, now: Date, form: PolicyForm): Promise<void> {
  demand(actor, 'threshold:adopt')
  const signed = await signAct(db, { actor, password: form.password, now, ...SIGNED })
  await tx(db, async (inside) => {
    const before = await newestSetting(inside, KEY, { lock: true })
    if ((before?.id ?? 0) !== form.seen) {
      throw new DomainError(
        'conflict',
        'Somebody has set this since your page was made. Nothing has been changed: look at what holds now, and set it again if you still want to.',
      )
    }
    const act = await useSignedAct(inside, signed, { actor, now, ...SIGNED })
    const value: PermitPolicy = { extensionAllowed: form.extensionAllowed, keepDays: form.keepDays }
    await insertSetting(inside, {
      settingKey: KEY,
      value,
      setBy: actor.personId,
      setAt: now,
      reason: form.reason,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'permit policy set',
      subjectKind: SIGNED.subjectKind,
      subjectId: KEY,
      before: before === null ? { ...DEFAULT_PERMIT_POLICY } : PermitPolicySchema.parse(before.value),
      after: { ...value },
      reason: form.reason,
      signedActId: act.id,
    })
  })
}
