/** Crews of the demo, two of two people, and its holiday. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { crew, holiday } from '../../app/db/schema/index.ts'
import type { Roster } from '../../app/domain/schedule/rosters.ts'

const WORKED = [{ days: [1, 2, 3, 4, 5], from: '06:45', to: '19:00' }]

function roster(firstMonday: string): Roster {
  return { worked: WORKED, onCall: { firstMonday, everyWeeks: 2 } }
}

/** Writes crews and holidays. */
export async function seedCrews(db: DbOrTx): Promise<number> {
  await db.insert(crew).values([
    { code: 'A', name: 'Crew A: Larkspur, Fennimore', size: 2, roster: roster('2026-11-16') },
    // On call in the week of the demo's morning.
    { code: 'B', name: 'Crew B: Ashgrove-Tull, Copperfield-Oyelaran', size: 2, roster: roster('2026-11-09') },
  ])
  await db.insert(holiday).values({ day: '2026-12-08', name: 'Local feast' })
  return 2
}
