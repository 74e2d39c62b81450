/** Instants for tests. Services take `now` as a parameter, so nothing here replaces a clock. */

/** An ordinary morning of tests: 2026-11-09 08:00 at +01:00. */
export const MORNING = new Date('2026-11-09T07:00:00.000Z')

/** An instant so many seconds after (or, negative, before) another. */
export function after(at: Date, seconds: number): Date {
  return new Date(at.getTime() + seconds * 1000)
}
