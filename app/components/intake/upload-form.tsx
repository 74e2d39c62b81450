/** Sending a night file: a plain form, which with a script shows how far the file is and takes larger ones. */
import { type FormEvent, useState } from 'react'
import { Form, Link, useNavigation } from 'react-router'
import type { UploadFailure } from '#app/domain/imports.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button } from '../ui/button.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { sizeText } from './file-words.ts'
import { type UploadState, useUpload } from './use-upload.ts'

const MIB = 1024 * 1024

export function UploadForm({
  sources,
  limitMib,
  formLimitMib,
  failure,
}: {
  sources: readonly { code: string; name: string }[]
  limitMib: number
  formLimitMib: number
  failure: UploadFailure | undefined
}) {
  const { state, send, stop } = useUpload()
  const posting = useNavigation().formMethod === 'POST'
  const [source, setSource] = useState(failure?.source ?? '')
  const [tooLarge, setTooLarge] = useState<string | null>(null)
  const shown = state.kind === 'failed' ? state.failure : state.kind === 'idle' ? failure : undefined
  const busy = posting || state.kind === 'sending' || state.kind === 'reading'

  function submit(event: FormEvent<HTMLFormElement>): void {
    const file = new FormData(event.currentTarget).get('file')
    // Without a file the server says what is missing; with one, the bytes go on their own.
    if (!(file instanceof File) || file.name === '' || source === '') return
    event.preventDefault()
    if (file.size > limitMib * MIB) {
      setTooLarge(
        `${file.name} has ${sizeText(file.size)}; at most ${limitMib} MiB are taken. Split it at a line end.`,
      )
      return
    }
    setTooLarge(null)
    send(source, file)
  }

  const fileErrors = [...(tooLarge === null ? [] : [tooLarge]), ...(shown?.fields.file ?? [])]
  return (
    <>
      <FormFailure failure={shown} />
      {shown !== undefined && shown.importId !== null && (
        <p className="mb-4">
          <Link to={`/intake/${shown.importId}`} className="link inline-block py-0.5">
            Look at import {shown.importId}
          </Link>
        </p>
      )}
      <Form method="post" encType="multipart/form-data" onSubmit={submit}>
        <div className="grid gap-x-4 sm:grid-cols-2">
          <SelectField
            name="source"
            label="Source"
            required
            value={source}
            onChange={(event) => setSource(event.target.value)}
            options={[
              { value: '', label: 'Choose the logger' },
              ...sources.map(({ code, name }) => ({ value: code, label: `${code}, ${name}` })),
            ]}
            errors={shown?.fields.source}
          />
          <TextField
            name="file"
            label="File"
            type="file"
            required
            hint={
              <>
                As the logger wrote it, up to {limitMib} MiB
                {formLimitMib < limitMib && <> ({formLimitMib} MiB where scripts are switched off)</>}.
              </>
            }
            errors={fileErrors}
            onChange={(event) => {
              const name = event.target.files?.[0]?.name ?? ''
              const named = sources.find(({ code }) => name.startsWith(`${code}_`))
              if (named !== undefined) setSource(named.code)
            }}
          />
        </div>
        <div className="flex flex-wrap items-center gap-3">
          <Button kind="primary" disabled={busy}>
            Send and read
          </Button>
          {state.kind === 'sending' && (
            <Button type="button" onClick={stop}>
              Stop
            </Button>
          )}
        </div>
        <Progress state={state} />
      </Form>
    </>
  )
}

function Progress({ state }: { state: UploadState }) {
  if (state.kind !== 'sending' && state.kind !== 'reading') return null
  const share = state.kind === 'reading' ? 1 : state.sent / Math.max(1, state.total)
  return (
    <div className="mt-3 max-w-md">
      <progress value={share} max={1} aria-label="Sent" className="block h-2 w-full accent-vac" />
      <p className="mt-1 text-sm text-ink-2" role="status">
        {state.kind === 'reading'
          ? 'All bytes have arrived; the last lines are being read.'
          : `${Math.floor(share * 100)} % of ${sizeText(state.total)} sent`}
      </p>
    </div>
  )
}
