/** Everything that the rules of permits look at, gathered for one permit at one instant. */
import type { DbOrTx } from '../db/client.server.ts'
import { listGrantRows } from '../db/queries/people.server.ts'
import { listPlanners } from '../db/queries/permit-register.server.ts'
import { findPermitVersion, listPermitActs, type PermitRow } from '../db/queries/permits.server.ts'
import { type Actor, may } from '../domain/actor.ts'
import { blockingItems } from '../domain/bake-plan-readiness.ts'
import { unadoptedOf } from '../domain/hazards.ts'
import { missingParts } from '../domain/permit-completeness.ts'
import type { PermitActor, PermitFacts, UnpreparedTube } from '../domain/permit-facts.ts'
import type { PermitAct } from '../domain/permit-words.ts'
import { type FactsNeeded, factsNeeded, standsInTheWay } from '../domain/permits.ts'
import { roleHas, rolesAt } from '../domain/roles.ts'
import { readTubeItems } from './bake-plans-facts.server.ts'
import { readHeating } from './heating.server.ts'
import { readLocksOut, readPoints } from './isolation-points.server.ts'
import { readConflicts } from './permit-conflicts.server.ts'
import { readHazardsOf } from './permit-hazards.server.ts'
import { readPermitPolicy } from './permit-policy.server.ts'
import { readTests } from './permit-tests.server.ts'

const EVERYTHING: FactsNeeded = { hazards: true, conflicts: true, tube: true }

/**
 * Facts of a permit at an instant.
 *
 * @param permit as it is stored, or with another content to judge what it would be
 * @param options.act only what the rule of this act looks at is gathered; everything without it
 * @param options.windowTo conflicts are looked for until then instead of the end of the window, for an extension
 */
export async function readPermitFacts(
  db: DbOrTx,
  permit: PermitRow,
  now: Date,
  { act, windowTo = permit.windowTo }: { act?: PermitAct; windowTo?: Date | null } = {},
): Promise<PermitFacts> {
  const { content } = permit
  const needed = act === undefined ? EVERYTHING : factsNeeded(act)
  const hazards = needed.hazards ? await readHazardsOf(db, content, now) : []
  const plans = [...new Set([permit.planId, content.planId])].filter((id) => id !== null)
  return {
    permit: { ...permit, approvedContent: await approvedContentOf(db, permit) },
    acts: await listPermitActs(db, permit.id),
    plannerIds: [...(await listPlanners(db, plans)).values()].flat(),
    missing: missingParts(
      content,
      hazards.map(({ key }) => key),
    ),
    unadopted: unadoptedOf(hazards),
    // Small heat without a plan, such as a blanket on a cross or the drying of a vented end, asks for no tests of the tube.
    unprepared: needed.tube && plans.length > 0 ? await unpreparedTube(db, content, now) : [],
    conflicts: needed.conflicts ? await readConflicts(db, { ...permit, windowTo }, now) : [],
    points: await readPoints(db, permit),
    locksOut: await readLocksOut(db, permit.id),
    tests: await readTests(db, permit, now),
    heating: await readHeating(db, content.segments, now),
    policy: await readPermitPolicy(db),
  }
}

/** What a bake plan's own checklist says of the tube, for the segments and the temperature that the permit names. */
async function unpreparedTube(
  db: DbOrTx,
  { segments, maxCelsius }: PermitRow['content'],
  now: Date,
): Promise<UnpreparedTube[]> {
  const open = blockingItems(await readTubeItems(db, segments, maxCelsius, now))
  return open.map(({ key, detail }) => ({ key, text: detail }))
}

async function approvedContentOf(db: DbOrTx, { id, content, version, approvedVersion }: PermitRow) {
  if (approvedVersion === null) return null
  return approvedVersion === version ? content : findPermitVersion(db, id, approvedVersion)
}

type GrantRow = Awaited<ReturnType<typeof listGrantRows>>[number]

/** When a second person confirmed a grant: whoever gave it to somebody else is that second person. */
function confirmedAt(grant: GrantRow): Date | null {
  return grant.confirmedAt ?? (grant.grantedById === grant.personId ? null : grant.grantedAt)
}

function approvingSince(grants: readonly GrantRow[], now: Date): Date | null {
  const times = grants
    .filter((grant) => roleHas(grant.role, 'permit:approve') && rolesAt([grant], now).length > 0)
    .flatMap((grant) => confirmedAt(grant)?.getTime() ?? [])
  return times.length === 0 ? null : new Date(Math.min(...times))
}

/** A person as the rules of permits see them: what they may do, and since when others know that they approve. */
export async function permitActor(db: DbOrTx, actor: Actor, now: Date): Promise<PermitActor> {
  const mayApprove = may(actor, 'permit:approve')
  return {
    personId: actor.personId,
    mayDraft: may(actor, 'permit:draft'),
    mayApprove,
    approvingSince: mayApprove
      ? approvingSince(await listGrantRows(db, { personId: actor.personId }), now)
      : null,
  }
}

/** Names of the officers who may decide on a permit, because they have had no other part in it. */
export async function officersApart(db: DbOrTx, facts: PermitFacts, now: Date): Promise<string[]> {
  const byPerson = new Map<number, GrantRow[]>()
  for (const grant of await listGrantRows(db)) {
    byPerson.set(grant.personId, [...(byPerson.get(grant.personId) ?? []), grant])
  }
  const names: string[] = []
  for (const [personId, grants] of byPerson) {
    const since = approvingSince(grants, now)
    if (since === null) continue
    const officer: PermitActor = { personId, mayDraft: false, mayApprove: true, approvingSince: since }
    const barred = standsInTheWay(facts, officer, 'approve', now).some(({ kind }) => kind === 'person')
    if (!barred) names.push((grants[0] as GrantRow).person)
  }
  return names.sort()
}
