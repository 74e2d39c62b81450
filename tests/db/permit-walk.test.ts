/** Five hundred steps of people over permits in the database, the product beside the model that was written apart. */
import { eq } from 'drizzle-orm'
import { expect, test } from 'vitest'
import { findPermit } from '#app/db/queries/permits.server.ts'
import {
  heatingStatement,
  isolationPoint,
  lockInUse,
  permitAct,
  permit as permitTable,
} from '#app/db/schema/index.ts'
import { DomainError } from '#app/domain/errors.ts'
import { dueAct, stateAsOf } from '#app/domain/permit-clock.ts'
import { ENDED_PERMIT_STATES } from '#app/domain/permit-words.ts'
import { actOnPermit, createPermit, productAct, savePermit } from '#app/services/permits.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { PASSWORD, type TestUser } from '#tests/support/factories.ts'
import { PermitModel, type Person, type Said, type Terms } from '#tests/support/permit-model.ts'
import {
  chooseAct,
  choosePerson,
  chooseSaid,
  chooseTerms,
  freshSurroundings,
  oneOf,
  randomFrom,
  type WalkAct,
} from '#tests/support/permit-walk.ts'
import {
  createPermitWorld,
  lockEverything,
  type PermitWorld,
  stateHeating,
  testEverything,
  worldContent,
} from '#tests/support/permit-world.ts'

const db = freshDatabase()
const STEPS = 500
const at = (hour: number) => after(MORNING, hour * 3600)

function contentOf(world: PermitWorld, terms: Terms) {
  return worldContent(world, {
    title: terms.whole ? 'A bake' : '',
    holderId: terms.holder,
    deputyIds: terms.deputies,
    from: at(terms.from).toISOString(),
    to: at(terms.to).toISOString(),
    unattended: terms.annex,
    nightCover: terms.annex ? 'pair' : '',
    ...(terms.annex ? { annex: { alarms: 'A', onCallMinutes: 30, shutOff: 'S' } } : {}),
  })
}

function detailOf(act: WalkAct, said: Said, now: number): object {
  if (act === 'site-check') return { barriersPlaced: said.barriers, signsPosted: said.signs, text: 'as seen' }
  if (act === 'accept' || act === 'revalidate') return { onSite: said.onSite }
  if (act === 'hand-over') return { outgoingId: said.outgoing, how: 'at-site' }
  if (act === 'extend') return { hours: said.hours, recheck: 'all of it' }
  if (act === 'made-safe') return { who: 'Somebody', at: at(now).toISOString(), how: 'set off' }
  if (act === 'cancel') return { inspection: 'looked at' }
  if (act !== 'hand-back') return {}
  return {
    outcome: 'stopped',
    plantState: 'cold',
    peopleClear: true,
    toolsOut: true,
    hottestC: 30,
    locks: said.locksOff ? 'removed' : 'left',
    locksText: 'next permit',
  }
}

test(`${STEPS} steps through services and tables do what the model does`, async () => {
  const world = await createPermitWorld(db)
  const users = [
    world.bram,
    world.pim,
    world.corwin,
    world.odalys,
    world.nerys,
    world.ione,
    world.rafe,
    world.magnus,
  ]
  const people: Person[] = users.map(({ personId, roles }) => ({
    id: personId,
    drafts: roles.includes('technician') || roles.includes('engineer'),
    officerSince: roles.includes('safety-officer') ? -10_000 : null,
  }))
  const userOf = (id: number) => users.find(({ personId }) => personId === id) as TestUser
  const random = randomFrom(31)
  const done = new Map<string, number>()
  let refused = 0
  let now = 0
  let steps = 0
  while (steps < STEPS) {
    const author = oneOf(random, [world.bram, world.pim])
    const around = freshSurroundings()
    const terms = chooseTerms(random, now, people)
    const model = new PermitModel(author.personId, terms, 0, around)
    const number = await createPermit(db, author, at(now), { content: contentOf(world, terms) })
    const { id: permitId } = (await findPermit(db, number)) as { id: number }
    const trail: string[] = []

    const unlock = async () => {
      for (const point of around.points) Object.assign(point, { lock: null, by: null, verifiedBy: null })
      await db.delete(lockInUse).where(eq(lockInUse.permitId, permitId))
      const removed = { removedBy: world.odalys.personId, removedAt: at(now), removedHow: 'owner' as const }
      await db.update(isolationPoint).set(removed).where(eq(isolationPoint.permitId, permitId))
    }
    let saidAt = Number.NEGATIVE_INFINITY
    /** Somebody's word on the heating, again before it is too old to count. */
    const heat = async (on: boolean) => {
      if (around.heating === on && now < saidAt + 6) return
      around.heating = on
      saidAt = now
      await db.delete(heatingStatement)
      await stateHeating(db, world, on, at(now))
    }
    /** What people do around the permit: readings and statements grow old, so they are given anew. */
    const prepare = async () => {
      if (around.points.every(({ lock }) => lock === null)) {
        const who = {
          appliedBy: world.odalys.personId,
          verifiedBy: oneOf(random, [world.nerys, world.nerys, world.magnus]).personId,
        }
        await lockEverything(db, number, at(now), who)
        for (const point of around.points)
          Object.assign(point, { lock: 'hangs', by: who.appliedBy, verifiedBy: who.verifiedBy })
      }
      const good = random() < 0.93
      await testEverything(db, number, at(now), world.nerys.personId, good)
      around.oxygen = { at: now, good }
      around.cutOut = { at: now, good }
    }

    for (let left = 40; left > 0 && steps < STEPS; left -= 1) {
      const long = ['issued', 'suspended', 'expired', 'handed-back'].includes(model.situation)
      now += oneOf(random, long ? [0.25, 0.5, 1, 1, 4] : [0.25, 0.25, 0.5])
      const chance = random()
      if (model.situation === 'handed-back' || chance < 0.04) await unlock()
      else if (chance < (model.situation === 'approved' ? 0.7 : 0.35) && model.situation !== 'draft')
        await prepare()
      await heat(random() < 0.07)

      model.becomes(now)
      const due = dueAct(
        (await findPermit(db, number)) as NonNullable<Awaited<ReturnType<typeof findPermit>>>,
        at(now),
      )
      if (due !== null && random() < 0.5) await productAct(db, at(now), number, due.act, { at: due.at })
      // Somebody's act notes the rest; who looked before is told, so here everybody looks after.
      else if (due !== null) await productAct(db, at(now), number, due.act, { at: due.at }).catch(() => null)

      const act = chooseAct(random, model.situation)
      const who = choosePerson(random, act, people, [model.terms.holder, ...model.terms.deputies])
      const said = chooseSaid(random, now, people, model.holder)
      const before = await findPermit(db, number)
      const revision = before?.revision ?? 0
      const reason = said.reason ? 'for a walk' : ''
      const edits = act === 'edit' || act === 'change-terms'
      const attempt = edits
        ? savePermit(db, userOf(who.id), at(now), number, {
            revision,
            content: contentOf(world, said.terms),
            reason,
          })
        : actOnPermit(db, userOf(who.id), at(now), number, {
            act,
            revision,
            reason,
            password: PASSWORD,
            detail: detailOf(act, said, now),
          })
      const outcome = await attempt.then(
        () => null,
        (error: unknown) => {
          if (error instanceof DomainError) return error
          throw error
        },
      )
      // The service itself chooses between editing and changing terms, by the permit's state.
      const meant = edits ? (['draft', 'returned'].includes(model.situation) ? 'edit' : 'change-terms') : act
      const allowed = model.attempt(meant, who, now, said)
      model.becomes(now)
      const words = () =>
        `${act} by ${userOf(who.id).name} at ${now} after ${trail.join(' ')}: ${JSON.stringify(outcome?.fields ?? null)}`
      expect(outcome === null, words()).toBe(allowed)
      const permit = await findPermit(db, number)
      if (permit === null) throw new Error(`${number} is gone`)
      const state = stateAsOf(permit, at(now)).state
      expect(state, words()).toBe(model.situation)
      expect(permit.holderId, words()).toBe(model.holder)
      expect(permit.windowTo, words()).toEqual(at(model.windowTo))
      if (state === 'issued') expect(permit.currentUntil, words()).toEqual(at(model.validUntil as number))
      expect(permit.revision - revision, words()).toBe(allowed ? 1 : 0)
      steps += 1
      if (allowed) {
        trail.push(act)
        done.set(act, (done.get(act) ?? 0) + 1)
      } else refused += 1
      if (ENDED_PERMIT_STATES.includes(permit.state)) left = Math.min(left, 2)
    }
    const end = await findPermit(db, number)
    const acts = await db
      .select({ revision: permitAct.revision })
      .from(permitAct)
      .where(eq(permitAct.permitId, permitId))
    expect(acts.map(({ revision }) => revision).sort((a, b) => a - b)).toEqual(
      Array.from({ length: end?.revision ?? 0 }, (_, i) => i + 1),
    )
    // Out of the way of the next one, whose segment is the same.
    await db.update(permitTable).set({ state: 'cancelled' }).where(eq(permitTable.id, permitId))
    now += 400
  }
  expect(refused).toBeGreaterThan(50)
  for (const act of ['request', 'approve', 'site-check', 'accept', 'revalidate', 'suspend', 'hand-back']) {
    expect(done.get(act) ?? 0, act).toBeGreaterThan(1)
  }
  // A busy machine takes long for so many commits.
}, 400_000)
