/** From a bake plan or from a segment to the first content of a permit, and what there is to choose from. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { listPlans, listPlanTicks, listSupplies, listValvesOf } from '../db/queries/bake-plans.server.ts'
import { listCircuits } from '../db/queries/permit-prefill.server.ts'
import { listPermits } from '../db/queries/permits.server.ts'
import { listLimits, listLines, listSegments, listSegmentTags } from '../db/queries/segments.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { ampsAndVolts, pairObjection } from '../domain/bake-load.ts'
import { BAKE_PLAN_STATE_LABELS } from '../domain/bake-plan.ts'
import { DomainError } from '../domain/errors.ts'
import { instantText } from '../domain/instant-text.ts'
import type { PermitContent } from '../domain/permit-content.ts'
import { type PrefillGround, type PrefillHeat, prefilledContent } from '../domain/permit-prefill.ts'
import { ENDED_PERMIT_STATES } from '../domain/permit-words.ts'
import { hoursText } from '../domain/schemas/permit-form.ts'
import { permitRequest, readPlan } from './bake-plans.server.ts'
import { bakedSegments, contentOf, planSegments } from './bake-plans-facts.server.ts'
import { getSite } from './site.server.ts'
import { limitFor } from './standing.server.ts'

/**
 * The first content of a permit for one link of a bake plan's chain.
 *
 * @param link which permit of the chain, from 1
 * @throws DomainError forbidden, not-found; not-acceptable-now with the list of missing steps; bad-input for a link that
 *   the chain does not have
 */
export async function prefillFromPlan(
  db: Db,
  actor: Actor,
  now: Date,
  planId: number,
  link: number,
): Promise<PermitContent> {
  demand(actor, 'permit:draft')
  const asked = await permitRequest(db, actor, now, planId)
  const { plan, content } = await readPlan(db, planId)
  const window = asked.windows.find(({ number }) => number === link)
  if (window === undefined) {
    const count = asked.windows.length
    throw new DomainError(
      'bad-input',
      count === 1
        ? `This plan needs one permit and has no permit ${link}. Choose the one.`
        : `The chain of this plan has ${count} permits and no permit ${link}. Choose one of them.`,
    )
  }
  const earthing = (await listPlanTicks(db, planId)).findLast(({ item }) => item === 'earthing-point-written')
  return prefilledContent(
    await groundOf(db, content.segments, content.supply, now),
    {
      celsius: content.celsius,
      rampKH: content.upKH,
      soakHours: content.soakHours,
      amps: asked.amps,
      volts: asked.volts,
    },
    {
      id: planId,
      version: plan.version,
      title: plan.title,
      cart: content.cart,
      link: { number: link, of: asked.windows.length },
      from: window.from,
      to: window.to,
      earthing: earthing?.done === true ? earthing.note : '',
    },
  )
}

/**
 * The first content of a permit by hand. With a temperature the ramp is the site's usual one, and with a supply set as
 * well current and voltage are what the model asks for at the end of it.
 *
 * @throws DomainError forbidden, bad-input (unknown segment, a pair of two diameters, unknown supply)
 */
export async function prefillFromSegments(
  db: Db,
  actor: Actor,
  now: Date,
  asked: { segments: readonly string[]; celsius: number | null; supply: string | null },
): Promise<PermitContent> {
  demand(actor, 'permit:draft')
  const ground = await groundOf(db, asked.segments, asked.supply, now)
  return prefilledContent(ground, await usualHeat(db, asked, now), null)
}

async function usualHeat(
  db: Db,
  {
    segments: tags,
    celsius,
    supply,
  }: { segments: readonly string[]; celsius: number | null; supply: string | null },
  now: Date,
): Promise<PrefillHeat> {
  const rampKH =
    celsius === null ? null : (limitFor(await listLimits(db, now), 'ramp-rate', null)?.value ?? null)
  const bare = { celsius, rampKH, soakHours: null, amps: null, volts: null }
  const { ambientC } = await getSite(db)
  if (celsius === null || supply === null || rampKH === null || celsius <= ambientC) return bare
  const baked = await bakedSegments(db, await planSegments(db, tags, now))
  return { ...bare, ...ampsAndVolts(baked, ambientC, celsius, rampKH) }
}

async function groundOf(
  db: DbOrTx,
  tags: readonly string[],
  supplyTag: string | null,
  now: Date,
): Promise<PrefillGround> {
  const segments = await planSegments(db, tags, now)
  await refuseUnlikePair(db, segments)
  const ids = segments.map(({ id }) => id)
  const [all, lines, valves, supplies] = await Promise.all([
    listSegments(db, now),
    listLines(db),
    listValvesOf(db, ids),
    listSupplies(db),
  ])
  const supply = supplies.find(({ tag }) => tag === supplyTag)
  if (supplyTag !== null && supply === undefined) {
    throw new DomainError('bad-input', 'One field needs another look; no permit has been made.', {
      fields: { supply: [`The register has no supply set "${supplyTag}".`] },
    })
  }
  const beside = new Set(
    valves
      .flatMap(({ segmentId, eastSegmentId }) => [segmentId, eastSegmentId])
      .filter((id) => id !== null && !ids.includes(id)),
  )
  const neighbours = all.filter(({ id }) => beside.has(id))
  const circuits = await listCircuits(db, [...ids, ...neighbours.map(({ id }) => id)])
  const tagOf = (id: number | null) => all.find((one) => one.id === id)?.tag
  return {
    segments: [...segments]
      .sort((a, b) => a.startM - b.startM)
      .map((one) => ({
        tag: one.tag,
        line: lines.find(({ id }) => id === one.lineId)?.name ?? one.lineCode,
        startM: one.startM,
        endM: one.endM,
        circuits: circuits.filter(({ segmentId }) => segmentId === one.id),
      })),
    neighbours: neighbours.map(({ id, tag }) => ({
      tag,
      blankets: circuits
        .filter(({ segmentId, kind }) => segmentId === id && kind === 'blanket')
        .map((circuit) => circuit.tag),
    })),
    valves: valves.map(({ tag, kind, segmentId, eastSegmentId }) => ({
      tag,
      kind,
      between: [tagOf(segmentId), tagOf(eastSegmentId)].filter((one) => one !== undefined),
    })),
    supply: supply === undefined ? null : { tag: supply.tag, openCircuitVolts: supply.openCircuitVolts },
  }
}

async function refuseUnlikePair(
  db: DbOrTx,
  segments: Awaited<ReturnType<typeof planSegments>>,
): Promise<void> {
  const [first, second] = await bakedSegments(db, segments)
  if (first === undefined || second === undefined) return
  const objection =
    first.tag === second.tag
      ? `${first.tag} is named twice. Name two segments, or one.`
      : pairObjection(first, second)
  if (objection === null) return
  throw new DomainError('bad-input', 'One field needs another look; no permit has been made.', {
    fields: { second: [objection] },
  })
}

interface PlanChoice {
  id: number
  title: string
  state: string
  segments: readonly string[]
  createdBy: string
  /** Permits that can be asked for; empty where none can. */
  links: { number: number; text: string }[]
  /** Why none can be asked for. */
  refusal: { message: string; missing: string[] } | null
  /** Permits made from it that have not ended. */
  permits: { number: string; title: string }[]
}

export interface NewPermitData {
  plans: PlanChoice[]
  segments: string[]
  supplies: { tag: string; maxAmps: number; maxVolts: number }[]
  /** The plan that the address names. */
  asked: number | null
}

/** What a new permit can be made from. Each plan is judged as it stands now. */
export async function readNewPermit(
  db: Db,
  actor: Actor,
  now: Date,
  askedPlan: string | null,
): Promise<NewPermitData> {
  demand(actor, 'permit:draft')
  const [plans, segments, supplies, permits, site] = await Promise.all([
    listPlans(db),
    listSegmentTags(db),
    listSupplies(db),
    listPermits(db),
    getSite(db),
  ])
  const open = plans.filter(({ state }) => state === 'draft' || state === 'ready' || state === 'under-way')
  const standing = permits.filter(({ state }) => !ENDED_PERMIT_STATES.includes(state))
  const choices: PlanChoice[] = []
  for (const plan of open) {
    choices.push({
      id: plan.id,
      title: plan.title,
      state: BAKE_PLAN_STATE_LABELS[plan.state],
      segments: contentOf(plan.content).segments,
      createdBy: plan.createdBy,
      ...(await linksOf(db, actor, now, plan.id, site.timeZone)),
      permits: standing
        .filter(({ planId }) => planId === plan.id)
        .map(({ number, content }) => ({ number, title: content.title })),
    })
  }
  return {
    plans: choices,
    segments,
    supplies: supplies.map(({ tag, maxAmps, maxVolts }) => ({ tag, maxAmps, maxVolts })),
    asked: askedPlan !== null && /^[1-9]\d{0,8}$/.test(askedPlan) ? Number(askedPlan) : null,
  }
}

async function linksOf(
  db: Db,
  actor: Actor,
  now: Date,
  planId: number,
  zone: string,
): Promise<Pick<PlanChoice, 'links' | 'refusal'>> {
  try {
    const { windows } = await permitRequest(db, actor, now, planId)
    const links = windows.map(({ number, fromH, toH, from, to }) => {
      const when =
        from === null || to === null
          ? 'the plan has no start yet'
          : `${instantText(from, zone)} to ${instantText(to, zone)}`
      const which = windows.length === 1 ? 'One permit' : `Permit ${number} of ${windows.length}`
      return { number, text: `${which}: ${hoursText(toH - fromH)}, ${when}` }
    })
    return { links, refusal: null }
  } catch (error) {
    if (!(error instanceof DomainError)) throw error
    return { links: [], refusal: { message: error.message, missing: error.fields.form ?? [] } }
  }
}
