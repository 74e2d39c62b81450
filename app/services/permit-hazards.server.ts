/** Cautions of a permit as the register, its newest version and the site's thresholds have them now. */
import type { DbOrTx } from '../db/client.server.ts'
import { listSupplies, listValvesOf } from '../db/queries/bake-plans.server.ts'
import type { PermitRow } from '../db/queries/permits.server.ts'
import { listSegments } from '../db/queries/segments.server.ts'
import { listHeaters } from '../db/queries/thresholds.server.ts'
import {
  type HazardGround,
  type HazardView,
  hazardViews,
  unadoptedOf,
  valuesInForce,
} from '../domain/hazards.ts'
import { instantText } from '../domain/instant-text.ts'
import type { PermitContent } from '../domain/permit-content.ts'
import type { UnadoptedThreshold } from '../domain/permit-facts.ts'
import { bakedSegments } from './bake-plans-facts.server.ts'
import { getSite } from './site.server.ts'
import { openAdoptions, readBayVolume } from './thresholds.server.ts'

/** Every hazard of the form, in its order, with the figures of the permit's segments. */
export function readHazards(db: DbOrTx, permit: PermitRow, now: Date): Promise<HazardView[]> {
  return readHazardsOf(db, permit.content, now)
}

/** The same for a content that is not stored yet, as a form that is being filled in has it. */
export async function readHazardsOf(db: DbOrTx, content: PermitContent, now: Date): Promise<HazardView[]> {
  const { ambientC, timeZone } = await getSite(db)
  const adoptions = await openAdoptions(db)
  const ground: HazardGround = {
    content,
    ambientC,
    adopted: valuesInForce(adoptions, now),
    bay: await readBayVolume(db),
    ...(await plantOf(db, content, now)),
  }
  return hazardViews(ground, adoptions, now, (at) => instantText(at, timeZone).slice(0, 10))
}

/** A tag that the register does not know has no figures; that it is unknown is for the form to say. */
async function plantOf(
  db: DbOrTx,
  content: PermitContent,
  now: Date,
): Promise<Pick<HazardGround, 'segments' | 'supply' | 'heaters' | 'valves'>> {
  const all = await listSegments(db, now)
  const rows = content.segments.flatMap((tag) => all.find((one) => one.tag === tag) ?? [])
  const ids = rows.map(({ id }) => id)
  const supply =
    content.supply === null ? undefined : (await listSupplies(db)).find(({ tag }) => tag === content.supply)
  return {
    segments: await bakedSegments(db, rows),
    supply: supply ?? null,
    heaters: await listHeaters(db, ids),
    valves: await listValvesOf(db, [...ids, 0]),
  }
}

/** Cautions of a permit that rest on a value which the site has not adopted, or has let lapse. */
export async function unadoptedThresholds(
  db: DbOrTx,
  permit: PermitRow,
  now: Date,
): Promise<UnadoptedThreshold[]> {
  return unadoptedOf(await readHazards(db, permit, now))
}
