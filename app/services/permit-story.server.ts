/** The story of a permit: every table that knows of it, told in one order. */
import { z } from 'zod'
import type { Db } from '../db/client.server.ts'
import { listPeople } from '../db/queries/people.server.ts'
import {
  listPermitVersions,
  listStoryBoxLocks,
  listStoryEvents,
  listStoryHeating,
  listStoryPoints,
  listStoryRounds,
  listStoryRulings,
  listStoryTests,
  type StoryBoxLock,
  type StoryPoint,
  type StoryTest,
} from '../db/queries/permit-story.server.ts'
import { findPermit, listPermitActs, type PermitActRow } from '../db/queries/permits.server.ts'
import { listRecordRows } from '../db/queries/record.server.ts'
import { DomainError } from '../domain/errors.ts'
import { instantText } from '../domain/instant-text.ts'
import { PermitContentSchema } from '../domain/permit-content.ts'
import { detailWords } from '../domain/permit-detail.ts'
import { type PermitDifference, type PermitWording, permitDifferences } from '../domain/permit-differences.ts'
import { permitStory, type StoryEvent, type StoryLine } from '../domain/permit-story.ts'
import type { PermitState } from '../domain/permit-words.ts'
import { listPermitPhotos } from './permit-photos.server.ts'
import { getSite } from './site.server.ts'

/** More blocked attempts than this are not told one by one. */
const MOST_ATTEMPTS = 500

export interface PermitHistoryData {
  number: string
  title: string
  segments: readonly string[]
  state: PermitState
  revision: number
  lines: StoryLine[]
}

type NameOf = (id: number) => string

/** Everything that happened to and around a permit, oldest first. @throws DomainError not-found */
export async function readPermitHistory(db: Db, number: string): Promise<PermitHistoryData> {
  const permit = await findPermit(db, number)
  if (permit === null) throw new DomainError('not-found', `There is no permit ${number}.`)
  const [site, people, acts, versions] = await Promise.all([
    getSite(db),
    listPeople(db),
    listPermitActs(db, permit.id),
    listPermitVersions(db, permit.id),
  ])
  const names = new Map(people.map(({ id, name }) => [id, name]))
  const nameOf: NameOf = (id) => names.get(id) ?? `person ${id}`
  const wording: PermitWording = {
    person: nameOf,
    time: (iso) => instantText(new Date(iso), site.timeZone),
  }
  const contents = versions.map(({ version, content }) => ({
    version,
    content: PermitContentSchema.parse(content),
  }))
  const differencesOf = (version: number): PermitDifference[] => {
    const own = contents.find((each) => each.version === version)
    const before = contents.findLast((each) => each.version < version)
    return own === undefined || before === undefined
      ? []
      : permitDifferences(before.content, own.content, wording)
  }
  const ended = permit.endedAt ?? new Date(8.64e15)
  const until = ended.getTime() > Date.UTC(9000, 0) ? new Date(Date.UTC(9000, 0)) : ended
  const [points, boxLocks, tests, rounds, rulings, dangers, heating, photos, attempts] = await Promise.all([
    listStoryPoints(db, permit.id),
    listStoryBoxLocks(db, permit.id),
    listStoryTests(db, permit.id),
    listStoryRounds(db, permit.id),
    listStoryRulings(db, permit.id),
    listStoryEvents(db, permit.id),
    listStoryHeating(db, permit.id, permit.windowFrom ?? permit.createdAt, until),
    listPermitPhotos(db, number),
    listRecordRows(db, { subjectKind: 'permit', subjectId: number, limit: MOST_ATTEMPTS }),
  ])
  const events: StoryEvent[] = [
    ...actEvents(acts, differencesOf, wording),
    ...points.flatMap((point) => pointEvents(point, nameOf)),
    ...boxLocks.flatMap((lock) => boxEvents(lock, nameOf)),
    ...tests.map((test) => testEvent(test, nameOf)),
    ...rounds.map(
      ({ round, who }): StoryEvent => ({
        kind: 'round',
        at: round.at,
        recordedAt: round.recordedAt,
        who,
        hottestC: round.hottestC,
        atM: round.hottestAtM,
        inOrder: round.inOrder,
        text: round.text,
      }),
    ),
    ...rulings.map(
      ({ ruling, who }): StoryEvent => ({
        kind: 'ruling',
        at: ruling.ruledAt,
        signed: ruling.signedActId !== null,
        who,
        allowed: ruling.allowed,
        facts: ruling.facts,
        text: ruling.text,
      }),
    ),
    ...dangers.flatMap(dangerEvents),
    ...heating.map(
      ({ statement, who, segmentTag }): StoryEvent => ({
        kind: 'heating',
        at: statement.at,
        recordedAt: statement.recordedAt,
        on: statement.on,
        segment: segmentTag,
        who,
        how: statement.how,
      }),
    ),
    ...photos.map(
      ({ createdAt, createdByName, fileName }): StoryEvent => ({
        kind: 'photo',
        at: createdAt,
        who: createdByName ?? 'Somebody',
        name: fileName,
      }),
    ),
    ...attempts
      .filter(({ act }) => act === BLOCKED)
      .map(
        ({ at, person, after }): StoryEvent => ({
          kind: 'attempt',
          at,
          who: person,
          ...attemptIn(after),
        }),
      ),
  ]
  return {
    number,
    title: permit.content.title,
    segments: permit.content.segments,
    state: permit.state,
    revision: permit.revision,
    lines: permitStory(events),
  }
}

/** How the record names an act on a permit that somebody was not let do. */
const BLOCKED = 'permit attempt blocked'

const AttemptSchema = z
  .object({ attempt: z.string(), reasons: z.array(z.object({ text: z.string() })) })
  .catch({ attempt: 'act on it', reasons: [] })

/** What was tried and why it was not let, as services/permits.server.ts writes it down. */
function attemptIn(after: unknown): { what: string; reason: string } {
  const { attempt, reasons } = AttemptSchema.parse(after)
  return { what: attempt.replaceAll('-', ' '), reason: reasons.map(({ text }) => text).join(' ') }
}

function actEvents(
  acts: readonly PermitActRow[],
  differencesOf: (version: number) => PermitDifference[],
  wording: PermitWording,
): StoryEvent[] {
  let version = acts[0]?.version ?? 1
  return acts.map((row): StoryEvent => {
    const differences = row.version > version ? differencesOf(row.version) : []
    version = row.version
    return {
      kind: 'act',
      at: row.at,
      recordedAt: row.recordedAt,
      signed: row.signed,
      act: row.act,
      fromState: row.fromState,
      toState: row.toState,
      who: row.personName,
      reason: row.reason,
      details: detailWords(row.detail, wording),
      revision: row.revision,
      version: row.version,
      differences,
    }
  })
}

function pointEvents(point: StoryPoint, nameOf: NameOf): StoryEvent[] {
  const { tag, lockNumber: lock } = point
  const witness = (id: number | null) => (id === null ? null : nameOf(id))
  const events: StoryEvent[] = [
    {
      kind: 'lock-on',
      at: point.appliedAt,
      signed: point.appliedSignedActId !== null,
      tag,
      isolates: point.isolates,
      lock,
      who: nameOf(point.appliedBy),
      witness: witness(point.appliedWitness),
    },
  ]
  if (point.verifiedAt !== null && point.verifiedBy !== null) {
    events.push({
      kind: 'lock-verified',
      at: point.verifiedAt,
      signed: point.verifiedSignedActId !== null,
      tag,
      lock,
      who: nameOf(point.verifiedBy),
      witness: witness(point.verifiedWitness),
      found: [point.releasedHow, point.zeroEnergy].filter((text) => text !== '').join('; '),
    })
  }
  if (point.removedAt !== null && point.removedBy !== null) {
    events.push({
      kind: 'lock-off',
      at: point.removedAt,
      signed: point.removedSignedActId !== null,
      tag,
      lock,
      who: nameOf(point.removedBy),
      witness: witness(point.removedWitness),
      how: point.removedHow ?? 'owner',
      note: point.note,
    })
  }
  return events
}

function boxEvents(lock: StoryBoxLock, nameOf: NameOf): StoryEvent[] {
  const witness = (id: number | null) => (id === null ? null : nameOf(id))
  const own = { box: lock.boxCode, lock: lock.lockNumber }
  const events: StoryEvent[] = [
    {
      kind: 'box-on',
      at: lock.onAt,
      signed: lock.onSignedActId !== null,
      ...own,
      who: nameOf(lock.ownerId),
      witness: witness(lock.onWitness),
      primary: lock.primary,
    },
  ]
  if (lock.offAt !== null) {
    events.push({
      kind: 'box-off',
      at: lock.offAt,
      signed: lock.offSignedActId !== null,
      ...own,
      owner: nameOf(lock.ownerId),
      who: nameOf(lock.offBy ?? lock.ownerId),
      witness: witness(lock.offWitness),
      how: lock.offHow ?? 'owner',
    })
  }
  return events
}

function testEvent(test: StoryTest, nameOf: NameOf): StoryEvent {
  return {
    kind: 'test',
    at: test.takenAt,
    recordedAt: test.recordedAt,
    test: test.kind,
    place: test.place,
    result: test.value === null ? '' : `${test.value} ${test.unit}`.trim(),
    passed: test.passed,
    instrument: test.instrumentSerial,
    who: nameOf(test.testerId),
    witness: test.witnessId === null ? null : nameOf(test.witnessId),
    note: test.note,
  }
}

function dangerEvents({
  event,
  endedByName,
  toleratedByName,
}: Awaited<ReturnType<typeof listStoryEvents>>[number]): StoryEvent[] {
  const events: StoryEvent[] = [
    {
      kind: 'danger',
      at: event.startedAt,
      recordedAt: event.noticedAt,
      event: event.kind,
      text: event.text,
    },
  ]
  if (event.toleratedAt !== null) {
    events.push({
      kind: 'danger-tolerated',
      at: event.toleratedAt,
      event: event.kind,
      who: toleratedByName,
      reason: event.toleratedReason,
    })
  }
  if (event.endedAt !== null) {
    events.push({
      kind: 'danger-over',
      at: event.endedAt,
      event: event.kind,
      who: endedByName,
      reason: event.endReason,
    })
  }
  return events
}
