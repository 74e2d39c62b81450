/** From a domain error to what React Router sends. */
import { data } from 'react-router'
import type { FieldErrors } from '../domain/errors.ts'
import { DomainError } from '../domain/errors.ts'

/** What an action returns when it could not do what was asked; the form shows it and keeps what was typed. */
export interface ActionFailure {
  ok: false
  message: string
  fields: FieldErrors
  /** What was typed, without passwords, so that a page without script can fill its form again. */
  typed: Record<string, string>
}

/** An action's answer to a domain error; anything else is thrown on to the error page and the log. */
export function failure(error: unknown, posted: Record<string, string>) {
  if (!(error instanceof DomainError)) throw error
  const typed = withoutPasswords(posted)
  return data({ ok: false, message: error.message, fields: error.fields, typed } satisfies ActionFailure, {
    status: error.status,
  })
}

/** A password goes into no answer: it is typed again. */
export function withoutPasswords(posted: Record<string, string>): Record<string, string> {
  return Object.fromEntries(Object.entries(posted).filter(([name]) => !/password/i.test(name)))
}

/** A loader's answer to a domain error: the plain error page with its status and sentence. */
export function refuse(error: unknown): never {
  if (!(error instanceof DomainError)) throw error
  throw data({ message: error.message }, { status: error.status })
}

/** Awaits a service in a loader; a domain error becomes the plain error page. */
export async function orRefuse<Result>(work: Promise<Result>): Promise<Result> {
  try {
    return await work
  } catch (error) {
    return refuse(error)
  }
}
