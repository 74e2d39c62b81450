/**
 * Signing in by e-mail address and password, through remix-auth's form strategy. A refusal never says which of the two
 * was wrong, and takes as long for an unknown address as for a wrong password.
 */
import { Authenticator } from 'remix-auth'
import { FormStrategy } from 'remix-auth-form'
import { getDb } from '../db/client.server.ts'
import { findPersonByEmail } from '../db/queries/people.server.ts'
import { DomainError } from '../domain/errors.ts'
import { SignInSchema } from '../domain/schemas/sign-in.ts'
import { machineNow } from '../machine-time.server.ts'
import { productNow } from '../services/clock.server.ts'
import { createAttemptLimit } from './attempt-limit.server.ts'
import { hashPassword, verifyPassword } from './password.ts'

const REFUSAL = 'That address and password do not belong together. Check both and try again.'

/** For addresses known or not, so that this refusal does not tell either which ones exist. */
const wrongPasswords = createAttemptLimit(10, 5 * 60_000)

/** Something to verify against when the address is unknown, so that the answer takes the same time. */
let decoy: Promise<string> | undefined

async function verifyForm(form: FormData): Promise<{ personId: number }> {
  const parsed = SignInSchema.safeParse(Object.fromEntries(form))
  if (!parsed.success) {
    throw new DomainError('bad-input', 'Enter your address and your password.', {
      fields: Object.fromEntries(
        parsed.error.issues.map((issue) => [String(issue.path[0]), [issue.message]]),
      ),
    })
  }
  const found = await findPersonByEmail(getDb(), parsed.data.email)
  // By person where there is one: the database finds an address by several spellings of it.
  const key = found === null ? `address ${parsed.data.email.toLowerCase()}` : `person ${found.id}`
  wrongPasswords.begin(key, machineNow())
  decoy ??= hashPassword('nobody has this password')
  const fits = await verifyPassword(found?.passwordHash ?? (await decoy), parsed.data.password)
  if (found === null || found.passwordHash === null || !fits) throw new DomainError('not-signed-in', REFUSAL)
  wrongPasswords.succeed(key)
  const now = await productNow(getDb())
  if (found.endsAt !== null && found.endsAt <= now) {
    throw new DomainError(
      'not-signed-in',
      'This account has ended. Ask the administrator if you still need it.',
    )
  }
  return { personId: found.id }
}

export const authenticator = new Authenticator<{ personId: number }>()
authenticator.use(new FormStrategy(({ form }) => verifyForm(form)), 'form')
