/** Power caps of the site that a schedule cannot do without. */
import { LIMIT_KIND_FACTS } from '../register.ts'
import type { ScheduleRules } from './problem.ts'

/** One sentence for each cap that the register lacks, with who can mend it; empty when it has both. */
export function missingCaps({ dayKW, nightKW }: Pick<ScheduleRules, 'dayKW' | 'nightKW'>): string[] {
  const caps = [
    ['power-cap-day', dayKW],
    ['power-cap-night', nightKW],
  ] as const
  return caps
    .filter(([, kW]) => kW === null)
    .map(
      ([kind]) =>
        `The register has no limit “${LIMIT_KIND_FACTS[kind].label}”, so no bake can be given power. An engineer sets it under Register, Limits.`,
    )
}
