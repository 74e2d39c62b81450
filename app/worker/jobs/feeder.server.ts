/**
 * The loggers of the demo: every five minutes of the product's time they post, through the product's own API, what has
 * happened to the heated segments since their last row. When the clock has been moved forward they send what lies
 * between, in several posts.
 */
import { createHash } from 'node:crypto'
import type { Db } from '../../db/client.server.ts'
import type { ScheduledTask } from '../../domain/job-kinds.ts'
import { env } from '../../env.server.ts'
import { log } from '../../log.server.ts'
import { ensureDemoToken } from '../../services/api-tokens.server.ts'
import { productNow } from '../../services/clock.server.ts'
import type { JobContext } from '../../services/jobs.server.ts'
import { liveEnd } from '../../services/live-readings.server.ts'

/** Six hours of rows in a post: some 1 700 readings. */
const ROWS_A_POST = 72
/** In one run, for each logger; what is left then is sent at the next. */
const POSTS_A_RUN = 24
const POST_WITHIN_MS = 30_000
const TOKEN_NAME = 'Five-minute feed of the demo'
/** Long after the demo: its clock may be moved by years. */
const TOKEN_ENDS = new Date('2099-12-31T00:00:00Z')

export interface FeederSettings {
  apiUrl: string
  token: string
}

/** Address and token of the feeder; null where this is no demo, or none of the two is set. */
function settings(): FeederSettings | null {
  const { DEMO, API_URL, FEEDER_TOKEN } = env()
  return DEMO && API_URL !== '' && FEEDER_TOKEN !== '' ? { apiUrl: API_URL, token: FEEDER_TOKEN } : null
}

/** What the schedule has to do for the feeder: nothing outside the demo. */
export function feederTasks(): ScheduledTask[] {
  return settings() === null ? [] : [{ name: 'feed-demo', kind: 'feed-demo', everySeconds: 300 }]
}

export async function feedDemo({ db, signal }: JobContext<'feed-demo'>): Promise<void> {
  const found = settings()
  if (found === null) return
  const posts = await feed(db, await productNow(db), found, signal)
  log.debug('the demo was fed', { posts })
}

/**
 * Posts what is new up to `now`.
 *
 * @returns how many posts were taken
 * @throws Error when the API cannot be reached or answers with something that trying again may mend
 */
export async function feed(
  db: Db,
  now: Date,
  { apiUrl, token }: FeederSettings,
  signal: AbortSignal,
): Promise<number> {
  // Loaded here and not above: a real site's worker never reads the demo.
  const { FED_SOURCES, feedInstants, feedReadings } = await import('#seeds/feeder/feed.ts')
  await ensureDemoToken(db, now, { token, name: TOKEN_NAME, sources: FED_SOURCES, endsAt: TOKEN_ENDS })
  let posts = 0
  for (const source of FED_SOURCES) {
    let afterMs = (await liveEnd(db, source, now))?.getTime() ?? 0
    for (let turn = 0; turn < POSTS_A_RUN && !signal.aborted; turn += 1) {
      const instants = feedInstants(afterMs, now.getTime(), ROWS_A_POST)
      const last = instants.at(-1)
      if (last === undefined) break
      const body = JSON.stringify({ readings: instants.flatMap((atMs) => feedReadings(source, atMs)) })
      const taken = await post(`${apiUrl}/api/v1/sources/${source}/readings`, token, body, signal)
      if (!taken) return posts
      posts += 1
      afterMs = last
    }
  }
  return posts
}

/** Sends one post; false when the API wants none of this token now, which is for a person or for time to mend. */
async function post(address: string, token: string, body: string, signal: AbortSignal): Promise<boolean> {
  const response = await fetch(address, {
    method: 'POST',
    headers: {
      Authorization: `Bearer ${token}`,
      'Content-Type': 'application/json',
      // The same rows have the same key, so that a post whose answer was lost is not taken twice.
      'Idempotency-Key': createHash('sha256').update(body).digest('hex'),
    },
    body,
    signal: AbortSignal.any([signal, AbortSignal.timeout(POST_WITHIN_MS)]),
  })
  const answer = await response.text()
  if (response.ok) return true
  const facts = { address, status: response.status, answer: answer.slice(0, 1_000) }
  if (![401, 403, 429].includes(response.status))
    throw new Error(`The API answered the demo's feeder with ${response.status}: ${facts.answer}`)
  log.warn("the API refused the demo's feeder", facts)
  return false
}
