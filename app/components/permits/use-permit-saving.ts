/** Saves the permit form while it is typed: what is saved, what is not and why, and what to do about it. */
import { useCallback, useEffect, useMemo, useRef, useState } from 'react'
import type { UseFormReturn } from 'react-hook-form'
import { useFetcher } from 'react-router'
import { missingParts } from '#app/domain/permit-completeness.ts'
import type { PermitContent } from '#app/domain/permit-content.ts'
import type { MissingPart } from '#app/domain/permit-facts.ts'
import type { PermitFormValues } from '#app/domain/permit-form-values.ts'
import type { HazardKey } from '#app/domain/permit-words.ts'
import { permitFormSchema } from '#app/domain/schemas/permit-form.ts'
import type { PermitFormAnswer } from '#app/services/permit-form.server.ts'
import { type FormBasis, forgetText, keepText } from './kept-text.ts'

/** How long nothing is typed before it is saved, and how long until what failed is tried again. */
const QUIET_MS = 5000
const AGAIN_MS = 15_000

export type SaveStatus =
  | { kind: 'as-loaded' }
  | { kind: 'typed' }
  | { kind: 'saving' }
  | { kind: 'saved'; at: Date }
  | { kind: 'unreadable'; count: number }
  | { kind: 'refused' }
  | { kind: 'changed' }
  | { kind: 'signed-out' }
  | { kind: 'offline' }

export interface PermitSaving {
  status: SaveStatus
  basis: FormBasis
  /** By what stands in the form now, as far as it can be read. */
  missing: readonly MissingPart[]
  answer: PermitFormAnswer | undefined
  /** Sends what stands in the form. `then` is called once it is saved. */
  save: (then?: () => void) => void
  /** Goes on from text that was kept, or from a version that somebody else has saved. */
  goOnFrom: (values: PermitFormValues, basis: FormBasis) => void
}

interface Facts {
  number: string
  personId: number
  zone: string
  /** The product's time when the page was opened, UTC ISO 8601. */
  opened: string
  basis: FormBasis
  missing: readonly MissingPart[]
  hazardKeys: readonly HazardKey[]
  /** Whether it is saved without being asked to; otherwise text is only kept in this browser. */
  asTyped: boolean
}

/** @param element the form in the page, which is what is sent */
export function usePermitSaving(
  form: UseFormReturn<PermitFormValues, unknown, PermitContent>,
  element: React.RefObject<HTMLFormElement | null>,
  facts: Facts,
): PermitSaving {
  const { number, personId, zone, opened, hazardKeys, asTyped } = facts
  const schema = useMemo(() => permitFormSchema(zone), [zone])
  const fetcher = useFetcher<PermitFormAnswer>()
  const [status, setStatus] = useState<SaveStatus>({ kind: 'as-loaded' })
  const [basis, setBasis] = useState(facts.basis)
  const [missing, setMissing] = useState(facts.missing)
  const basisNow = useRef(facts.basis)
  const timer = useRef<ReturnType<typeof setTimeout>>(undefined)
  /** What the server has, and what is on its way there, as the text of the values. */
  const saved = useRef<string>(JSON.stringify(form.getValues()))
  const sent = useRef<string | null>(null)
  const whenSaved = useRef<(() => void) | undefined>(undefined)
  /** After a refusal of this kind nothing is sent until somebody presses the button. */
  const stopped = useRef(false)

  const moveTo = useCallback((next: FormBasis) => {
    basisNow.current = next
    setBasis(next)
  }, [])

  const { submit } = fetcher
  const send = useCallback(() => {
    if (element.current === null || sent.current !== null) return
    const data = new FormData(element.current)
    data.set('intent', 'autosave')
    data.set('revision', String(basisNow.current.revision))
    data.set('version', String(basisNow.current.version))
    sent.current = JSON.stringify(form.getValues())
    setStatus({ kind: 'saving' })
    void submit(data, { method: 'post' })
  }, [element, form, submit])

  const saveQuietly = useCallback(() => {
    const read = schema.safeParse(form.getValues())
    if (!read.success) {
      const fields = new Set(read.error.issues.map(({ path }) => path.join('.')))
      setStatus({ kind: 'unreadable', count: fields.size })
      return
    }
    setMissing(missingParts(read.data, hazardKeys))
    if (!asTyped || stopped.current || JSON.stringify(form.getValues()) === saved.current) return
    send()
  }, [schema, form, hazardKeys, asTyped, send])

  // Through a box, so that the timer outlives the renderings that what is typed causes.
  const newest = useRef(saveQuietly)
  useEffect(() => {
    newest.current = saveQuietly
  }, [saveQuietly])
  const later = useCallback((ms: number) => {
    clearTimeout(timer.current)
    timer.current = setTimeout(() => newest.current(), ms)
  }, [])

  useEffect(() => {
    const stop = form.subscribe({
      formState: { values: true },
      callback: ({ values }) => {
        if (JSON.stringify(values) === saved.current) return
        keepText(number, personId, { basis: basisNow.current, at: opened, values })
        setStatus((before) => (keepsWords(before) ? before : { kind: 'typed' }))
        later(QUIET_MS)
      },
    })
    const online = () => later(0)
    window.addEventListener('online', online)
    return () => {
      stop()
      window.removeEventListener('online', online)
      clearTimeout(timer.current)
    }
  }, [form, number, personId, opened, later])

  useEffect(() => {
    const text = sent.current
    if (fetcher.state !== 'idle' || fetcher.data === undefined || text === null) return
    sent.current = null
    const answer = fetcher.data
    const then = whenSaved.current
    whenSaved.current = undefined
    if (answer.kind === 'saved') {
      stopped.current = false
      saved.current = text
      moveTo({ revision: answer.revision, version: answer.version })
      setStatus({ kind: 'saved', at: answer.at })
      if (JSON.stringify(form.getValues()) === text) {
        forgetText(number, personId)
        then?.()
      } else if (then === undefined) {
        later(QUIET_MS)
      } else {
        // More was typed on the way: what waits for the saving waits for that too.
        whenSaved.current = then
        send()
      }
      return
    }
    if (answer.kind === 'rows') return
    stopped.current = answer.kind !== 'offline'
    setStatus({ kind: answer.kind })
    if (answer.kind === 'changed') {
      moveTo({ revision: answer.revision, version: answer.version })
      form.reset(answer.values)
      keepText(number, personId, { basis: basisNow.current, at: opened, values: answer.values })
    }
    if (answer.kind === 'offline') later(AGAIN_MS)
  }, [fetcher.state, fetcher.data, form, number, personId, opened, later, moveTo, send])

  return {
    status,
    basis,
    missing,
    answer: fetcher.state === 'idle' ? fetcher.data : undefined,
    save: (then) => {
      clearTimeout(timer.current)
      stopped.current = false
      whenSaved.current = then
      send()
    },
    goOnFrom: (values, next) => {
      moveTo(next)
      form.reset(values)
      later(QUIET_MS)
    },
  }
}

/** Words that stay while more is typed: they say why nothing is saved. */
function keepsWords({ kind }: SaveStatus): boolean {
  return kind === 'saving' || kind === 'changed' || kind === 'signed-out' || kind === 'offline'
}
