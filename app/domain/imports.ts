import type { FieldErrors } from './errors.ts'

/** Above this size the worker reads a file and takes it in; below it both are done while the sender waits. */
export const LARGE_FILE_BYTES = 16 * 1024 * 1024

/** States of a night file on its way in. */
export const IMPORT_STATES = ['reading', 'read', 'refused', 'accepted', 'discarded', 'withdrawn'] as const
export type ImportState = (typeof IMPORT_STATES)[number]

/** How an import came: as a file, or as a post of live readings that nobody has to look at. */
export const IMPORT_ARRIVALS = ['file', 'post'] as const

export const IMPORT_STATE_LABELS: Record<ImportState, string> = {
  reading: 'Being read',
  read: 'Read, not yet taken in',
  refused: 'Could not be read',
  accepted: 'Taken in',
  discarded: 'Discarded',
  withdrawn: 'Withdrawn',
}

/** States of a wish to withdraw an import. */
export const WITHDRAWAL_STATES = ['asked', 'agreed', 'done', 'refused'] as const
export type WithdrawalState = (typeof WITHDRAWAL_STATES)[number]

/** What an upload answers when nothing new waits to be taken in. */
export interface UploadFailure {
  ok: false
  message: string
  fields: FieldErrors
  /** The import that holds the refused file, or the earlier one with the same bytes. */
  importId: number | null
  /** The source that was chosen; empty when the form did not come that far. */
  source: string
}
