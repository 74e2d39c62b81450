/** Fills an empty database with the demo: an invented flight path as it is found on the morning of 2026-11-09. */
import type mysql from 'mysql2'
import type { Db } from '../app/db/client.server.ts'
import { record, site } from '../app/db/schema/index.ts'
import { tx } from '../app/db/transaction.server.ts'
import { elapsedMs, machineNow } from '../app/machine-time.server.ts'
import { ensureClock } from '../app/services/clock.server.ts'
import { createReadingPartitions } from '../app/services/partitions.server.ts'
import { seedCrews } from './bakes/crews.ts'
import { seedBakeDeviations } from './bakes/deviations.ts'
import { seedBakePlans } from './bakes/plans.ts'
import { seedBakeSchedule } from './bakes/schedule.ts'
import { seedCompetences } from './competences.ts'
import { DEMO_START } from './demo-time.ts'
import { seedForecasts } from './forecasts/forecasts.ts'
import { seedIsolationTests } from './forecasts/isolation-tests.ts'
import { seedLogEntries } from './log/seed-log.ts'
import { seedPeople } from './people.ts'
import { seedPermits } from './permits/permits.ts'
import { seedPlannedWorks } from './planned-works.ts'
import { loadReadings } from './readings/load.ts'
import { loadArchive, seedImports } from './readings/night-archive.ts'
import { seedTypedReadings, typedReadings } from './readings/typed.ts'
import { seedHardware } from './register/hardware.ts'
import { seedInstruments } from './register/instruments.ts'
import { seedLimits } from './register/limits.ts'
import { seedPositions } from './register/positions.ts'
import { seedSegments } from './register/segments.ts'
import { seedSources } from './register/sources.ts'
import { seedSegmentStates } from './segment-states.ts'
import { seedThresholds } from './thresholds.ts'

/**
 * Seeds the demo when the database holds no site yet, and does nothing otherwise. Readings go in first, since they are
 * too many for one transaction; the rest follows in one, with the site's row as the sign that all is there. A run that
 * was cut short is therefore begun again by the next, and readings that are there already stay.
 *
 * @returns whether anything was written
 */
export async function seedDemo(
  db: Db,
  pool: mysql.Pool,
  options: { log?: (line: string) => void } = {},
): Promise<{ seeded: boolean }> {
  const log = options.log ?? (() => {})
  const present = await db.select({ name: site.name }).from(site).limit(1)
  if (present[0] !== undefined) {
    log(`Demo: ${present[0].name} is there already, nothing to do`)
    return { seeded: false }
  }
  const began = performance.now()
  const seconds = () => `${(elapsedMs(began) / 1000).toFixed(1)} s`
  await createReadingPartitions(db, DEMO_START)
  const { archive, stored: logged } = await loadArchive(pool)
  const stored = logged + (await loadReadings(pool, typedReadings()))
  log(`Demo: ${stored} readings of ${archive.length} files stored (${seconds()})`)
  await tx(db, async (inside) => {
    const people = await seedPeople(inside)
    const segments = await seedSegments(inside)
    await seedHardware(inside)
    const positions = await seedPositions(inside)
    const { channels } = await seedSources(inside)
    const instruments = await seedInstruments(inside)
    await seedLimits(inside)
    await seedSegmentStates(inside)
    const typed = await seedTypedReadings(inside)
    const imports = await seedImports(inside, archive)
    const entries = await seedLogEntries(inside)
    const isolationTests = await seedIsolationTests(inside)
    const forecasts = await seedForecasts(inside)
    const bakePlans = await seedBakePlans(inside)
    const crews = await seedCrews(inside)
    // Before the schedule: a bake needs a licensed electrician.
    const competences = await seedCompetences(inside)
    await seedBakeSchedule(inside)
    const bakeDeviations = await seedBakeDeviations(inside)
    const thresholds = await seedThresholds(inside)
    const plannedWorks = await seedPlannedWorks(inside)
    const permits = await seedPermits(inside)
    const counts = {
      people,
      segments,
      positions,
      channels,
      instruments,
      typed,
      imports,
      entries,
      isolationTests,
      forecasts,
      bakePlans,
      crews,
      bakeDeviations,
      thresholds,
      competences,
      plannedWorks,
      permits,
    }
    await inside.insert(record).values({
      at: DEMO_START,
      machineAt: machineNow(),
      act: 'demo filled in',
      subjectKind: 'site',
      subjectId: '1',
      after: counts,
    })
    log(
      `Demo: ${Object.entries(counts)
        .map(([what, count]) => `${count} ${what}`)
        .join(', ')} (${seconds()})`,
    )
  })
  await ensureClock(db, { demo: true, startAt: DEMO_START })
  return { seeded: true }
}
