/** What has come back for an address, and when it is no use to try it again. */

/** So many mails that came back within BOUNCE_WINDOW_MS make an address one that cannot be reached. */
const BOUNCES_UNTIL_GIVEN_UP = 3
export const BOUNCE_WINDOW_MS = 7 * 86_400_000

export interface BounceFact {
  at: Date
  /** Action of RFC 3464 section 2.3.3: failed, delayed, delivered, relayed or expanded. */
  action: string
}

/** Those that count: a mail that is late has not come back. */
function failures<Bounce extends BounceFact>(bounces: readonly Bounce[], now: Date): Bounce[] {
  const since = now.getTime() - BOUNCE_WINDOW_MS
  return bounces.filter(({ at, action }) => action === 'failed' && at.getTime() > since && at <= now)
}

/** Whether mail to an address is no longer tried. It is tried again when fewer lie within the last week. */
export function isUndeliverable(bounces: readonly BounceFact[], now: Date): boolean {
  return failures(bounces, now).length >= BOUNCES_UNTIL_GIVEN_UP
}

/** How that is said where a mail would have been. */
export function undeliverableWords(address: string, bounces: readonly BounceFact[], now: Date): string {
  return `Not sent: ${failures(bounces, now).length} mails to ${address} came back within a week. Mend the address on its person’s page; without a change it is tried again when fewer than ${BOUNCES_UNTIL_GIVEN_UP} lie within the last week.`
}
