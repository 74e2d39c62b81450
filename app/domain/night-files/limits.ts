/** Bounds that keep the reader's memory and its report small whatever the file. */

/** Lines looked at before the shape of the file is settled. */
export const HEAD_LINES = 400
/** Characters after which the head is judged even with fewer lines. */
export const HEAD_CHARS = 512 * 1024
/** A longer line is skipped; the rest of it is swallowed unread. */
export const MAX_LINE_CHARS = 1024 * 1024
export const BATCH_SIZE = 8192
/** Readings remembered to find duplicates and conflicts, over all channels together. */
export const DUPLICATE_WINDOW = 300_000
/** Differing readings of one channel at one instant; the stored sequence number ends at 255. */
export const MAX_SEQ = 255
export const MAX_REJECTED = 1000
export const MAX_NOTES = 200
export const MAX_GAPS = 500
export const MAX_QUESTIONS = 200
export const MAX_TEXT = 300
/** Rows of a repeated hour held back until the order of the passes is known. */
export const MAX_HELD_ROWS = 200_000
/** A time more than this after the product clock is in the future. */
export const FUTURE_MS = 5 * 60_000
/** Loggers fall back to 1970, 2000 or 2010 when their clock battery dies; no earlier log is taken as dated. */
export const EARLIEST_MS = Date.UTC(2011, 0, 1)
/** A gap is more than this many periods without a row. */
export const GAP_PERIODS = 3
/** Steps of a small plot at most; the steps double in width when a file needs more. */
export const SKETCH_STEPS = 96
/** Equal figures in a row after which a gauge is pointed out as perhaps stuck: vacuum gauges are noisier than that. */
export const STUCK_ROWS = 60
