import { apiDocument } from '#app/domain/api-document.ts'
import { env } from '#app/env.server.ts'
import { POSTS_PER_MINUTE } from './rate-limit.server.ts'

/** What the API takes and answers, for programs and whoever writes them. It says nothing about the facility. */
export function loader() {
  return Response.json(apiDocument({ fileMib: env().MAX_NIGHT_FILE_MIB, postsPerMinute: POSTS_PER_MINUTE }))
}
