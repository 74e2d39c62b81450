/** The form of a permit: what it is filled from, and what becomes of what was typed into it. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { listPlans, listPlanTicks, listSupplies } from '../db/queries/bake-plans.server.ts'
import { listCompetences } from '../db/queries/competences.server.ts'
import { listPeople } from '../db/queries/people.server.ts'
import {
  findPermit,
  findPermitVersion,
  listPermitActs,
  type PermitRow,
} from '../db/queries/permits.server.ts'
import { listSegmentTags } from '../db/queries/segments.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError, type FieldErrors } from '../domain/errors.ts'
import type { HazardView } from '../domain/hazards.ts'
import { instantText } from '../domain/instant-text.ts'
import { stateAsOf } from '../domain/permit-clock.ts'
import { missingParts } from '../domain/permit-completeness.ts'
import { emptyPermitContent, type PermitContent } from '../domain/permit-content.ts'
import { type PermitDifference, type PermitWording, permitDifferences } from '../domain/permit-differences.ts'
import type { MissingPart } from '../domain/permit-facts.ts'
import { mergedValues, type PermitFormValues, permitFormValues } from '../domain/permit-form-values.ts'
import {
  type CompetenceKind,
  PERMIT_STATE_LABELS,
  type PermitAct,
  type PermitState,
} from '../domain/permit-words.ts'
import { permitFormSchema } from '../domain/schemas/permit-form.ts'
import { readHazards } from './permit-hazards.server.ts'
import { savePermit } from './permits.server.ts'
import { getSite } from './site.server.ts'

export interface PersonChoice {
  id: number
  name: string
  /** Whether the account has ended, so that the person should not be named any more. */
  ended: boolean
  competences: { kind: CompetenceKind; number: string; endsAt: Date | null }[]
}

/** Whether the form may be saved freely, changes what was approved, or is closed. */
export type PermitFormMode = 'free' | 'change-terms' | 'closed'

export interface PermitFormData {
  number: string
  title: string
  state: PermitState
  revision: number
  version: number
  /** Who looks at it. */
  personId: number
  mode: PermitFormMode
  /** What that means, in a sentence; empty for `free`. */
  modeText: string
  values: PermitFormValues
  segments: string[]
  supplies: { tag: string; maxAmps: number; maxVolts: number }[]
  people: PersonChoice[]
  plan: { id: number; title: string; version: number; newest: number; crewNote: string | null } | null
  hazards: HazardView[]
  missing: readonly MissingPart[]
}

/**
 * A permit's form as it stands.
 *
 * @throws DomainError forbidden, not-found
 */
export async function readPermitForm(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
): Promise<PermitFormData> {
  demand(actor, 'permit:draft')
  const permit = await existing(db, number)
  const [site, segments, supplies, people, hazards, plan] = await Promise.all([
    getSite(db),
    listSegmentTags(db),
    listSupplies(db),
    peopleFor(db, permit.content, now),
    readHazards(db, permit, now),
    planOf(db, permit.content),
  ])
  const { state } = stateAsOf(permit, now)
  return {
    number,
    title: permit.content.title,
    state,
    revision: permit.revision,
    version: permit.version,
    personId: actor.personId,
    ...modeOf(permit, state),
    values: permitFormValues(permit.content, site.timeZone),
    segments: withOwn(segments, permit.content.segments),
    supplies: supplies.map(({ tag, maxAmps, maxVolts }) => ({ tag, maxAmps, maxVolts })),
    people,
    plan,
    hazards,
    missing: missingParts(
      permit.content,
      hazards.map(({ key }) => key),
    ),
  }
}

/** A tag that has left the register still stands in the list of a permit that names it. */
function withOwn(tags: readonly string[], own: readonly string[]): string[] {
  return [...tags, ...own.filter((tag) => !tags.includes(tag))]
}

function modeOf(
  { number, approvedByName }: PermitRow,
  state: PermitState,
): Pick<PermitFormData, 'mode' | 'modeText'> {
  const label = PERMIT_STATE_LABELS[state].toLowerCase()
  if (state === 'draft' || state === 'returned') return { mode: 'free', modeText: '' }
  if (state === 'approved' || state === 'suspended') {
    const by = approvedByName === null ? '' : ` by ${approvedByName}`
    const heat = state === 'suspended' ? ' It can be saved only while heating is known to be off.' : ''
    return {
      mode: 'change-terms',
      modeText: `This permit is ${label} and was approved${by}. Saving any change here ends that approval: the permit is requested again, somebody has to approve the new terms, and a copy that was posted no longer holds.${heat}`,
    }
  }
  const ways: Partial<Record<PermitState, string>> = {
    requested:
      'An officer looks at what it says now. To change it, ask the officer to return it, with the reason.',
    issued:
      'Its terms stand as approved. Suspend it first and switch the heating off; then the terms can be changed.',
    expired: 'It can only be handed back. Further work needs a new permit.',
    'handed-back': 'It waits for the inspection and is not changed any more.',
  }
  const way = ways[state] ?? 'It has ended and is not changed any more. Draw up a new permit.'
  return { mode: 'closed', modeText: `${number} is ${label}. ${way}` }
}

async function planOf(db: DbOrTx, { planId, planVersion }: PermitContent): Promise<PermitFormData['plan']> {
  if (planId === null) return null
  const [plan] = await listPlans(db, { planId })
  if (plan === undefined) return null
  const crew = (await listPlanTicks(db, planId)).findLast(({ item }) => item === 'crew-named')
  return {
    id: planId,
    title: plan.title,
    version: planVersion ?? plan.version,
    newest: plan.version,
    crewNote: crew?.done === true && crew.note !== '' ? crew.note : null,
  }
}

/** Everybody whose account stands, and whoever is named already. */
async function peopleFor(db: DbOrTx, content: PermitContent, now: Date): Promise<PersonChoice[]> {
  const { holderId, deputyIds, crewIds, isolatingPersonId, electricianId, attendantId } = content
  const named = new Set([holderId, isolatingPersonId, electricianId, attendantId, ...deputyIds, ...crewIds])
  const [people, competences] = await Promise.all([listPeople(db), listCompetences(db)])
  return people
    .map(({ id, name, endsAt }) => ({
      id,
      name,
      ended: endsAt !== null && endsAt <= now,
      competences: competences
        .filter(({ personId, startsAt }) => personId === id && startsAt <= now)
        .map(({ kind, number, endsAt: until }) => ({ kind, number, endsAt: until })),
    }))
    .filter(({ id, ended }) => !ended || named.has(id))
}

/** What a form that was sent comes to. */
export type PermitFormAnswer =
  | { kind: 'saved'; revision: number; version: number; state: PermitState; at: Date }
  /** A row was added or taken out; nothing has been saved. */
  | { kind: 'rows'; values: PermitFormValues; revision: number; version: number; reason: string }
  | {
      kind: 'refused'
      message: string
      fields: FieldErrors
      values: PermitFormValues
      revision: number
      version: number
      reason: string
    }
  | {
      kind: 'changed'
      since: { who: string; what: string; at: Date }[]
      differences: PermitDifference[]
      /** Labels of what both changed; what was typed stands. */
      both: string[]
      values: PermitFormValues
      revision: number
      version: number
      reason: string
    }
  | { kind: 'signed-out' }
  | { kind: 'offline' }

export interface SentForm {
  revision: number
  version: number
  values: PermitFormValues
  reason: string
}

/**
 * Saves what was typed. Where somebody else saved since the form was filled, nothing is saved: the answer says who did
 * what, and holds both people's changes put together for the typist to look through.
 *
 * @throws DomainError forbidden, not-found; what cannot be read or saved comes back as `refused`
 */
export async function savePermitForm(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  sent: SentForm,
): Promise<PermitFormAnswer> {
  demand(actor, 'permit:draft')
  const { revision, version, values, reason } = sent
  const typed = { values, revision, version, reason }
  const { timeZone } = await getSite(db)
  const read = permitFormSchema(timeZone).safeParse(values)
  if (!read.success) {
    const fields: FieldErrors = {}
    for (const { path, message } of read.error.issues) {
      const name = path.join('.') || 'form'
      fields[name] = [...(fields[name] ?? []), message]
    }
    const count = Object.keys(fields).length
    const message = `${count === 1 ? 'One field needs' : `${count} fields need`} another look; nothing has been saved.`
    return { kind: 'refused', message, fields, ...typed }
  }
  try {
    const saved = await savePermit(db, actor, now, number, { revision, content: read.data, reason })
    return { kind: 'saved', ...saved, at: now }
  } catch (error) {
    if (!(error instanceof DomainError) || error.code === 'forbidden' || error.code === 'not-found')
      throw error
    if (error.code === 'conflict') return whatChanged(db, number, sent, timeZone)
    return { kind: 'refused', message: error.message, fields: error.fields, ...typed }
  }
}

const ACT_WORDS: Partial<Record<PermitAct, string>> = {
  edit: 'saved a version',
  request: 'requested it',
  return: 'returned it',
  refuse: 'refused it',
  approve: 'approved it',
  'change-terms': 'changed its terms',
  withdraw: 'took it back',
  discard: 'threw it away',
  accept: 'accepted it on site',
  suspend: 'suspended it',
  cancel: 'cancelled it',
}

async function whatChanged(
  db: DbOrTx,
  number: string,
  { revision, version, values, reason }: SentForm,
  zone: string,
): Promise<PermitFormAnswer> {
  const permit = await existing(db, number)
  const base = (await findPermitVersion(db, permit.id, version)) ?? emptyPermitContent()
  const [acts, people] = await Promise.all([listPermitActs(db, permit.id), listPeople(db)])
  const wording: PermitWording = {
    person: (id) => people.find((person) => person.id === id)?.name ?? `person ${id}`,
    time: (iso) => instantText(new Date(iso), zone),
  }
  const merged = mergedValues(permitFormValues(base, zone), values, permitFormValues(permit.content, zone))
  const differences = permitDifferences(base, permit.content, wording)
  return {
    kind: 'changed',
    since: acts
      .filter((act) => act.revision > revision)
      .map(({ act, personName, at }) => ({
        who: personName ?? 'The product',
        what: ACT_WORDS[act] ?? act.replaceAll('-', ' '),
        at,
      })),
    differences,
    both: collisions(base, permit.content, merged.both, zone, wording),
    values: merged.values,
    revision: permit.revision,
    version: permit.version,
    reason,
  }
}

/** Labels of what others saved in the fields that the typist changed as well, and of nothing else. */
function collisions(
  base: PermitContent,
  saved: PermitContent,
  both: readonly (keyof PermitFormValues)[],
  zone: string,
  wording: PermitWording,
): string[] {
  const theirs = permitFormValues(saved, zone)
  const only = {
    ...permitFormValues(base, zone),
    ...Object.fromEntries(both.map((key) => [key, theirs[key]])),
  }
  const read = permitFormSchema(zone).safeParse(only)
  return read.success ? permitDifferences(base, read.data, wording).map(({ label }) => label) : []
}

async function existing(db: DbOrTx, number: string): Promise<PermitRow> {
  const permit = await findPermit(db, number)
  if (permit === null) throw new DomainError('not-found', `There is no permit ${number}.`)
  return permit
}
