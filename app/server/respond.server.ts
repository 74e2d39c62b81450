/** From a domain error to what React Router sends. */
import { data } from 'react-router'
import type { FieldErrors } from '../domain/errors.ts'
import { DomainError } from '../domain/errors.ts'

/** What an action returns when it could not do what was asked; the form shows it and keeps what was typed. */
export interface ActionFailure {
  ok: false
  message: string
  fields: FieldErrors
}

/** An action's answer to a domain error; anything else is thrown on to the error page and the log. */
export function failure(error: unknown) {
  if (!(error instanceof DomainError)) throw error
  return data({ ok: false, message: error.message, fields: error.fields } satisfies ActionFailure, { status: error.status })
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
