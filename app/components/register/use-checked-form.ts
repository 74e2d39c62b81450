/** Checks a form in the browser by the very schema that the server uses, before it is sent. Without script it is simply sent. */
import { type FormEvent, useState } from 'react'
import type { z } from 'zod'
import type { ActionFailure } from '../forms/failure.ts'

export interface CheckedForm {
  /** What is wrong: found here, or else by the server. */
  failure: ActionFailure | undefined
  errorsOf: (name: string) => string[] | undefined
  onSubmit: (event: FormEvent<HTMLFormElement>) => void
}

/** @param answered what the server found at the last sending */
export function useCheckedForm(schema: z.ZodType, answered: ActionFailure | undefined): CheckedForm {
  const [found, setFound] = useState<ActionFailure>()
  const failure = found ?? answered
  return {
    failure,
    errorsOf: (name) => failure?.fields[name],
    onSubmit: (event) => {
      const parsed = schema.safeParse(Object.fromEntries(new FormData(event.currentTarget)))
      if (parsed.success) {
        setFound(undefined)
        return
      }
      event.preventDefault()
      const fields: ActionFailure['fields'] = {}
      for (const { path, message } of parsed.error.issues) {
        const key = path.join('.') || 'form'
        fields[key] = [...(fields[key] ?? []), message]
      }
      const count = Object.keys(fields).length
      setFound({
        ok: false,
        fields,
        message: `${count === 1 ? 'One field needs' : `${count} fields need`} another look; nothing has been saved.`,
      })
    },
  }
}
