/** Conflicts of a permit on its page: the drawing of the tube, the list, and the officer's rulings. */
import { CLAIMING_PERMIT_STATES } from '#app/domain/permit-words.ts'
import type { PermitPageData } from '#app/services/permit-page.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { Panel } from '../ui/panel.tsx'
import { ConflictList, markedConflicts } from './conflict-list.tsx'
import { TubeConflicts } from './tube-conflicts.tsx'

export function ConflictsPanel({
  content,
  along,
  conflicts,
  exclusion,
  revision,
  state,
  may,
  failure,
}: PermitPageData & { failure: ActionFailure | undefined }) {
  const heated = along
    .filter(({ tag }) => content.segments.includes(tag))
    .map(({ tag, lineCode, startM, endM }) => ({
      tag,
      line: lineCode,
      fromM: startM,
      toM: endM,
      ...exclusion,
    }))
  const marked = markedConflicts(conflicts)
  const open = CLAIMING_PERMIT_STATES.includes(state)
  return (
    <Panel title="Conflicts" id="conflicts" className="scroll-mt-4">
      {heated.length > 0 && open && <TubeConflicts heated={heated} marked={marked} />}
      <ConflictList conflicts={conflicts} ruling={may.rule && open ? { revision } : null} failure={failure} />
    </Panel>
  )
}
