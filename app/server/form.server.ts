/** From a posted form to checked values: the same zod schema as the form in the browser and the API. */
import type { z } from 'zod'
import { DomainError, type FieldErrors } from '../domain/errors.ts'

/** Messages per field of a zod error, keyed by dotted path. */
function fieldErrors(error: z.ZodError): FieldErrors {
  const fields: FieldErrors = {}
  for (const issue of error.issues) {
    const key = issue.path.join('.') || 'form'
    fields[key] = [...(fields[key] ?? []), issue.message]
  }
  return fields
}

/** Parses posted values; throws a DomainError that names every field at fault. */
export function parseValues<Schema extends z.ZodType>(schema: Schema, values: unknown): z.infer<Schema> {
  const parsed = schema.safeParse(values)
  if (parsed.success) return parsed.data
  const fields = fieldErrors(parsed.error)
  const count = Object.keys(fields).length
  throw new DomainError(
    'bad-input',
    count === 1
      ? 'One field needs another look; nothing has been saved.'
      : `${count} fields need another look; nothing has been saved.`,
    { fields },
  )
}

/** Fields of a posted form as text; a name that comes again counts as it came last. */
export function typedOf(form: FormData): Record<string, string> {
  return Object.fromEntries(
    [...form].flatMap(([name, value]) => (typeof value === 'string' ? [[name, value]] : [])),
  )
}
