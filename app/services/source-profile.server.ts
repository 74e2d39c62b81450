/** What a person says about reading a source's files that no file can say: kept as the next version of its profile. */
import type { Db } from '../db/client.server.ts'
import { listChannels } from '../db/queries/register-maps.server.ts'
import { findRegisterRow, lockRegisterRow, type RegisterRow } from '../db/queries/register-rows.server.ts'
import { saveProfile } from '../db/queries/source-history.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { channelKey } from '../domain/register.ts'
import type { ProfileReading } from '../domain/schemas/profile-reading.ts'
import { emptyProfile, type SourceProfile, SourceProfileSchema } from '../domain/schemas/source-profile.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault } from './register-values.server.ts'

export interface ProfilePart {
  /** Version the profile stands at; 0 where nothing is settled. */
  version: number
  curves: SourceProfile['curves']
  startingMinutes: number
  readingColumn: SourceProfile['readingColumn']
  /** Pressure channels of the source, and all of them. */
  pressureChannels: string[]
  channels: string[]
}

/** What the form starts from; null for a source that the register doesn't have. */
export async function readProfilePart(db: Db, code: string): Promise<ProfilePart | null> {
  const row = await findRegisterRow(db, 'sources', code)
  if (row === null) return null
  const own = (await listChannels(db)).filter(({ sourceId }) => sourceId === row.id)
  const { curves, startingMinutes, readingColumn } = profileOf(row)
  return {
    version: Number(row.columns.profileVersion),
    curves,
    startingMinutes,
    readingColumn,
    pressureChannels: own.filter(({ quantity }) => quantity === 'pressure').map(({ name }) => name),
    channels: own.map(({ name }) => name),
  }
}

/**
 * Makes the next version of a source's profile. Files that are taken in from now on are read by it; what was read before
 * keeps the version it was read by.
 *
 * @throws DomainError forbidden, not-found, conflict (another version came meanwhile), bad-input (a channel that the
 *   source doesn't have, or no change)
 */
export async function setProfileReading(
  db: Db,
  actor: Actor,
  now: Date,
  code: string,
  form: ProfileReading,
): Promise<void> {
  demand(actor, 'register:edit')
  await tx(db, async (inside) => {
    const row = await lockRegisterRow(inside, 'sources', code)
    if (row === null) throw new DomainError('not-found', `The register has no source ${code}.`)
    const version = Number(row.columns.profileVersion)
    if (version !== form.seen) {
      throw new DomainError(
        'conflict',
        `The way of reading ${code} went from version ${form.seen} to ${version} since you opened this form. Nothing of yours has been saved: look at the present one and do it again.`,
      )
    }
    const own = (await listChannels(inside)).filter(({ sourceId }) => sourceId === row.id)
    demandChannels(own, form.curves, code)
    const before = profileOf(row)
    const said = {
      curves: form.curves,
      startingMinutes: form.startingMinutes,
      readingColumn: form.readingColumn,
    }
    const was = {
      curves: before.curves,
      startingMinutes: before.startingMinutes,
      readingColumn: before.readingColumn,
    }
    if (JSON.stringify(said) === JSON.stringify(was))
      throw fieldFault({ form: `This is what version ${version} says already; nothing would change.` })
    const next: SourceProfile = { ...before, ...said, version: version + 1 }
    await saveProfile(inside, row.id, next)
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'way of reading a source changed',
      subjectKind: 'source',
      subjectId: code,
      effectiveAt: now,
      before: { version, ...inWords(was) },
      after: { version: next.version, ...inWords(said) },
      reason: form.reason,
    })
  })
}

function profileOf(row: RegisterRow): SourceProfile {
  return row.columns.profile == null ? emptyProfile() : SourceProfileSchema.parse(row.columns.profile)
}

function demandChannels(
  own: readonly { name: string; quantity: string }[],
  curves: SourceProfile['curves'],
  code: string,
): void {
  const find = (name: string) => own.find((channel) => channelKey(channel.name) === channelKey(name))
  for (const { channel, voltsChannel } of curves) {
    const found = find(channel)
    if (found === undefined)
      throw fieldFault({ form: `${code} has no channel "${channel}". Its channels stand on this page.` })
    if (found.quantity !== 'pressure')
      throw fieldFault({ form: `${channel} carries ${found.quantity}; a curve gives a pressure.` })
    if (voltsChannel !== null && find(voltsChannel)?.quantity !== 'voltage')
      throw fieldFault({
        form: `"${voltsChannel}" is no channel of ${code} that keeps volts. Leave it empty, or add the channel first.`,
      })
  }
}

/** As lines of the history show it. */
function inWords({
  curves,
  startingMinutes,
  readingColumn,
}: Pick<SourceProfile, 'curves' | 'startingMinutes' | 'readingColumn'>): Record<string, string | number> {
  const curve = ({
    channel,
    voltsPerDecade,
    voltsAtUnit,
    unit,
    voltsChannel,
  }: SourceProfile['curves'][number]) =>
    `${channel}: ${voltsPerDecade} V a decade, ${voltsAtUnit} V at 1 ${unit}${voltsChannel === null ? '' : `, volts kept in ${voltsChannel}`}`
  return {
    curves: curves.map(curve).join('; '),
    startingMinutes,
    readingColumn: readingColumn ?? '',
  }
}
