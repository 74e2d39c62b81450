/** What the register's actions answer when they refuse, and how they read their address. */
import { data } from 'react-router'
import { DomainError } from '#app/domain/errors.ts'
import { isRegisterKind, type RegisterKind } from '#app/domain/schemas/register.ts'
import { refuse, withoutPasswords } from '#app/server/respond.server.ts'

/** The kind that an address names; otherwise the plain 404 page. */
export function kindOf(text: string): RegisterKind {
  if (isRegisterKind(text)) return text
  return refuse(
    new DomainError('not-found', `The register has no kind "${text}". Its first page lists what it has.`),
  )
}

/**
 * The answer to a refused form: what is wrong, and what was typed, so that it can be shown again without script. After
 * a conflict nothing typed is shown: it would go over values that the reader has not seen yet.
 */
export function refused(error: unknown, typed: Record<string, string>) {
  if (!(error instanceof DomainError)) throw error
  return data(
    {
      ok: false as const,
      message: error.message,
      fields: error.fields,
      intent: typed.intent ?? '',
      typed: error.code === 'conflict' ? undefined : withoutPasswords(typed),
    },
    { status: error.status },
  )
}
