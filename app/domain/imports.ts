/** States of a night file on its way in. */
export const IMPORT_STATES = ['receiving', 'read', 'refused', 'accepted', 'discarded', 'withdrawn'] as const
export type ImportState = (typeof IMPORT_STATES)[number]

export const IMPORT_STATE_LABELS: Record<ImportState, string> = {
  receiving: 'Being received',
  read: 'Read, not yet taken in',
  refused: 'Could not be read',
  accepted: 'Taken in',
  discarded: 'Discarded',
  withdrawn: 'Withdrawn',
}
