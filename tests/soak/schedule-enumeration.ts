/**
 * Two hundred small schedules of bakes against going through all of them: the search finds the best, or says how far from
 * it the answer may be. Run with `npx tsx tests/soak/schedule-enumeration.ts`, with a number of seeds for fewer.
 */
import { pathToFileURL } from 'node:url'
import { solve } from '#app/domain/schedule/solve.ts'
import { violations } from '#app/domain/schedule/violations.ts'
import { bestByEnumeration, faultsOf, smallProblem } from '#tests/unit/schedule/enumeration.ts'

function run(seeds: number): boolean {
  const count = { best: 0, withinGap: 0, noneFits: 0, wrong: 0 }
  for (let seed = 1; seed <= seeds; seed += 1) {
    const small = smallProblem(seed)
    const best = bestByEnumeration(small)
    const found = solve(small, [], 'earliest-finish', { seed: 1, budget: 200 })
    if (found === null) throw new Error('a search that nobody stopped has no answer')
    const broken = violations(small, found.placements).filter(({ severity }) => severity === 'breaks')
    const all = found.unplaced.length === 0
    const value = found.value ?? 0
    if (faultsOf(small, found.placements).length > 0 || broken.length > 0) count.wrong += 1
    else if (best === null) count[all ? 'wrong' : 'noneFits'] += 1
    else if (!all || found.bound > best || value < best) count.wrong += 1
    else if (value === best) count.best += 1
    else if ((value - best) / value <= found.gap) count.withinGap += 1
    else count.wrong += 1
  }
  console.log(
    `${seeds} schedules: ${count.best} as good as the best, ${count.withinGap} within the gap they state, ${count.noneFits} that no schedule holds, ${count.wrong} wrong`,
  )
  return count.wrong === 0
}

if (import.meta.url === pathToFileURL(process.argv[1] ?? '').href) {
  if (!run(Number(process.argv[2] ?? 200))) process.exitCode = 1
}
