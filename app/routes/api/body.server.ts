/** The head and the body of a post to the API, checked before anything is made of them. */
import { DomainError } from '#app/domain/errors.ts'
import { RequestKeySchema } from '#app/domain/schemas/api-answers.ts'
import { POST_LIMITS } from '#app/domain/schemas/live-readings.ts'

/** The header Idempotency-Key. @throws DomainError bad-input */
export function requestKeyOf(headers: Headers): string {
  const given = headers.get('Idempotency-Key')?.trim()
  const key = RequestKeySchema.safeParse(given)
  if (key.success) return key.data
  const found = given === undefined || given === '' ? 'none' : `one of ${given.length} characters`
  throw new DomainError(
    'bad-input',
    `A post needs a header Idempotency-Key of 1 to 120 visible ASCII characters; found ${found}. Make a new one for each post, such as a random UUID, and send the same again when you repeat a post.`,
  )
}

/**
 * The body, whole.
 *
 * @throws DomainError wrong-type (not said to be JSON, or compressed), too-large
 */
export async function bytesOf(request: Request): Promise<Uint8Array> {
  const type = request.headers.get('Content-Type') ?? ''
  if (!/^application\/(?:[a-z0-9.+-]+\+)?json\s*(?:;|$)/i.test(type)) {
    throw new DomainError(
      'wrong-type',
      `Found the content type “${type.slice(0, 80)}”; expected application/json. Send the readings as JSON and say so.`,
    )
  }
  const coding = request.headers.get('Content-Encoding') ?? 'identity'
  if (coding !== 'identity')
    throw new DomainError(
      'wrong-type',
      `Found the content coding “${coding.slice(0, 80)}”. Send the body uncompressed.`,
    )
  if (Number(request.headers.get('Content-Length') ?? 0) > POST_LIMITS.bodyBytes) throw tooLarge()
  const { pieces, size } = await readWhole(request.body)
  const bytes = new Uint8Array(size)
  let at = 0
  for (const piece of pieces) {
    bytes.set(piece, at)
    at += piece.length
  }
  return bytes
}

async function readWhole(
  body: ReadableStream<Uint8Array> | null,
): Promise<{ pieces: Uint8Array[]; size: number }> {
  const pieces: Uint8Array[] = []
  let size = 0
  const reader = body?.getReader()
  try {
    for (;;) {
      const { value, done } = (await reader?.read()) ?? { value: undefined, done: true }
      if (done) return { pieces, size }
      size += value.length
      if (size > POST_LIMITS.bodyBytes) throw tooLarge()
      pieces.push(value)
    }
  } finally {
    // Not cancelled: that would close the connection before the answer has gone out.
    reader?.releaseLock()
  }
}

function tooLarge(): DomainError {
  return new DomainError(
    'too-large',
    `The body is larger than ${POST_LIMITS.bodyBytes / 2 ** 20} MiB, the most that one post may have. Send the readings in several posts.`,
  )
}
