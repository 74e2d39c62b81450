/** What reading a night file needs from the register, and the report as it is kept. */
import type { DbOrTx } from '../db/client.server.ts'
import { listSourceChannels, type SourceChannel, type SourceRow } from '../db/queries/imports.server.ts'
import { lastReadings } from '../db/queries/readings.server.ts'
import { previousEnd, saveProfile } from '../db/queries/source-history.server.ts'
import type { Actor } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { profileWithAnswers } from '../domain/night-files/profile-answers.ts'
import type { Answer, Question, ReadContext, ReadOut } from '../domain/night-files/types.ts'
import { offsetAt, wallText } from '../domain/night-files/zones.ts'
import { emptyProfile, type SourceProfile, SourceProfileSchema } from '../domain/schemas/source-profile.ts'
import { writeRecord } from './record.server.ts'
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
  file: {
    uploadedAt: Date
    fileName: string
    statedBytes: number | null
    answers: readonly Answer[]
    /** Whether questions about the file are to show what the source delivered before. */
    history?: boolean
  },
): Promise<ReadingRules> {
  const [channels, site] = await Promise.all([listSourceChannels(db, source.id), getSite(db)])
  const [before, lastKnown] =
    file.history === true ? await history(db, source, file.uploadedAt, channels) : [null, {}]
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
      channels: channels.map(({ name, quantity, ignored, fromAt, untilAt }) => ({
        name,
        quantity,
        ignored,
        fromMs: fromAt?.getTime() ?? null,
        untilMs: untilAt?.getTime() ?? null,
      })),
      fileName: file.fileName,
      statedBytes: file.statedBytes,
      answers: file.answers,
      previousEndMs: before?.getTime() ?? null,
      lastKnown,
    },
  }
}

/** What the source delivered before a file came. */
async function history(
  db: DbOrTx,
  source: SourceRow,
  uploadedAt: Date,
  channels: readonly SourceChannel[],
): Promise<[Date | null, NonNullable<ReadContext['lastKnown']>]> {
  const known = channels.filter(({ ignored }) => !ignored)
  const [before, last] = await Promise.all([
    previousEnd(db, source.id, uploadedAt),
    lastReadings(
      db,
      known.map(({ id }) => id),
      uploadedAt,
    ),
  ])
  const lastKnown = Object.fromEntries(
    known.flatMap(({ id, name }) => {
      const usable = last.get(id)?.usable
      if (usable === undefined || usable === null || usable.value === null) return []
      return [[name, { value: usable.value, atMs: usable.at.getTime() }]]
    }),
  )
  return [before, lastKnown]
}

/** Given answers with the question they answer, who gave them and when. A typed time has to be one. */
export function signedAnswers(
  given: readonly Answer[],
  questions: readonly Question[],
  actor: Actor,
  now: Date,
): Answer[] {
  return given
    .filter(({ choice }) => choice.trim() !== '')
    .map(({ id, choice }) => {
      const asked = questions.find((question) => question.id === id)
      const offered = asked?.choices.find(({ value }) => value === choice)
      const typed = asked?.typed === 'time' && TYPED_TIME.test(choice.trim())
      if (asked === undefined || (offered === undefined && !typed)) {
        throw new DomainError(
          'bad-input',
          asked?.typed === 'time'
            ? `“${choice}” is no time. Choose from the list, or give one such as 2026-11-08 06:00.`
            : `“${choice}” is no answer to a question of this file. Choose from the list.`,
        )
      }
      const { text, found } = asked
      return {
        id,
        choice: choice.trim(),
        text,
        found,
        ...(offered === undefined ? {} : { label: offered.label }),
        by: actor.name,
        at: now.toISOString(),
      }
    })
}

/** A time on the clock of the source. */
const TYPED_TIME =
  /^(?:19|20)\d\d-(?:0[1-9]|1[0-2])-(?:0[1-9]|[12]\d|3[01])[ T](?:[01]\d|2[0-3]):[0-5]\d(?::[0-5]\d)?$/

/**
 * Keeps what a file that is being taken in has settled about its source, as the next version of the profile. The
 * source's row has to be locked.
 *
 * @returns the new version, or null when there is nothing new
 */
export async function keepProfile(
  inside: DbOrTx,
  actor: Actor,
  now: Date,
  source: SourceRow,
  profile: SourceProfile,
  readOut: ReadOut,
): Promise<number | null> {
  // Without an answer nobody has confirmed anything.
  if (readOut.answers.length === 0) return null
  const next = profileWithAnswers(profile, readOut)
  if (next === null) return null
  await saveProfile(inside, source.id, next)
  await writeRecord(inside, {
    at: now,
    actor,
    act: 'profile of a source learnt from answers',
    subjectKind: 'source',
    subjectId: source.code,
    before: (source.profile ?? null) as object | null,
    after: next,
  })
  return next.version
}

/** An instant as the site's clock shows it, to the minute. */
export function siteMinute(at: Date, zone: string): string {
  return wallText(at.getTime() + offsetAt(zone, at.getTime()) * 60_000).slice(0, 16)
}
