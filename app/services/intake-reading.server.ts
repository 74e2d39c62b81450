/** What reading a night file needs from the register, and the report as it is kept. */
import type { DbOrTx } from '../db/client.server.ts'
import { listSourceChannels, type SourceChannel, type SourceRow } from '../db/queries/imports.server.ts'
import { DomainError } from '../domain/errors.ts'
import type { Answer, ReadContext, ReadOut } from '../domain/night-files/types.ts'
import { offsetAt, wallText } from '../domain/night-files/zones.ts'
import { emptyProfile, type SourceProfile, SourceProfileSchema } from '../domain/schemas/source-profile.ts'
import { getSite } from './site.server.ts'

/** The stored report of an import; null for one that came without a file (typed readings). */
export function storedReport(value: unknown): ReadOut | null {
  // Written by this program and never by anybody else; a later form of it raises `readerVersion`.
  return (value ?? null) as ReadOut | null
}

export interface ReadingRules {
  profile: SourceProfile
  context: ReadContext
  channels: SourceChannel[]
  zone: string
}

/**
 * Profile, channels and zone for one file. The instant is that of the upload, also when the file is read again
 * later, so that the same bytes always give the same readings.
 */
export async function readingRules(
  db: DbOrTx,
  source: SourceRow,
  file: { uploadedAt: Date; fileName: string; statedBytes: number | null; answers: readonly Answer[] },
): Promise<ReadingRules> {
  const [channels, site] = await Promise.all([listSourceChannels(db, source.id), getSite(db)])
  const profile =
    source.profile === null ? emptyProfile() : SourceProfileSchema.safeParse(source.profile).data
  if (profile === undefined) {
    throw new DomainError(
      'unavailable',
      `The profile of source ${source.code} in the register cannot be used. An engineer corrects it under Register, Sources.`,
    )
  }
  return {
    profile,
    channels,
    zone: site.timeZone,
    context: {
      nowMs: file.uploadedAt.getTime(),
      siteZone: site.timeZone,
      channels: channels.map(({ name, quantity, ignored }) => ({ name, quantity, ignored })),
      fileName: file.fileName,
      statedBytes: file.statedBytes,
      answers: file.answers,
    },
  }
}

/** An instant as the site's clock shows it, to the minute. */
export function siteMinute(at: Date, zone: string): string {
  return wallText(at.getTime() + offsetAt(zone, at.getTime()) * 60_000).slice(0, 16)
}
