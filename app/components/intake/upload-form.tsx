/**
 * Sending night files: a plain form for one file, which with a script takes several and larger ones, also dropped on
 * it, and shows how far each is.
 */
import { type DragEvent, type FormEvent, useEffect, useState } from 'react'
import { Form, Link, useNavigate, useNavigation, useRevalidator } from 'react-router'
import type { UploadFailure } from '#app/domain/imports.ts'
import type { UnfinishedUpload } from '#app/services/uploads.server.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button } from '../ui/button.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { ChosenFiles, SendingBar, type SourceChoice, sourceOfName, UnfinishedFiles } from './chosen-files.tsx'
import { sizeText } from './file-words.ts'
import type { FileToSend } from './upload-state.ts'
import { useUploads } from './use-upload.ts'

const MIB = 1024 * 1024

export function UploadForm({
  sources,
  limitMib,
  formLimitMib,
  unfinished,
  failure,
}: {
  sources: readonly SourceChoice[]
  limitMib: number
  formLimitMib: number
  unfinished: readonly UnfinishedUpload[]
  failure: UploadFailure | undefined
}) {
  const uploads = useUploads()
  const navigate = useNavigate()
  const { revalidate } = useRevalidator()
  const posting = useNavigation().formMethod === 'POST'
  // Only a script can send several: without one the field takes one file.
  const [scripted, setScripted] = useState(false)
  useEffect(() => setScripted(true), [])
  const [files, setFiles] = useState<FileToSend[]>([])
  const [source, setSource] = useState(failure?.source ?? '')
  const [dropping, setDropping] = useState(false)
  const several = files.length > 1
  const only = several ? undefined : files[0]
  const state = only === undefined ? undefined : uploads.states.get(only.key)
  const shown = state?.kind === 'failed' ? state.failure : state === undefined ? failure : undefined
  const busy = posting || uploads.busy
  const tooLarge = files.filter(({ file }) => file.size > limitMib * MIB)

  function choose(list: FileList | null): void {
    const chosen = [...(list ?? [])].map((file, index) => ({
      key: `${index} ${file.name}`,
      file,
      source: sourceOfName(file.name, sources),
    }))
    uploads.clear()
    setFiles(chosen)
    const [first] = chosen
    if (chosen.length === 1 && first !== undefined && first.source !== '') setSource(first.source)
  }

  async function submit(event: FormEvent<HTMLFormElement>): Promise<void> {
    // Without a file or a source the server says what is missing; with them, the bytes go on their own.
    if (files.length === 0 || (!several && source === '')) return
    event.preventDefault()
    if (tooLarge.length > 0) return
    const answered = uploads.states
    const toSend = several
      ? files.filter(({ key }) => answered.get(key)?.kind !== 'received')
      : files.map((file) => ({ ...file, source }))
    const states = await uploads.send(toSend)
    const [first] = states.values()
    if (!several && first?.kind === 'received') await navigate(first.href)
    else await revalidate()
  }

  function drop(event: DragEvent): void {
    event.preventDefault()
    setDropping(false)
    if (!busy && event.dataTransfer.files.length > 0) choose(event.dataTransfer.files)
  }

  return (
    <>
      <FormFailure failure={shown} />
      {!busy && <UnfinishedFiles uploads={unfinished} />}
      {shown !== undefined && shown.importId !== null && (
        <p className="mb-4">
          <Link to={`/intake/${shown.importId}`} className="link inline-block py-0.5">
            Look at import {shown.importId}
          </Link>
        </p>
      )}
      <Form
        method="post"
        encType="multipart/form-data"
        onSubmit={(event) => void submit(event)}
        onDragOver={(event) => {
          event.preventDefault()
          setDropping(true)
        }}
        onDragLeave={() => setDropping(false)}
        onDrop={drop}
        className={dropping ? 'outline-2 outline-offset-4 outline-vac outline-dashed' : ''}
      >
        <div className="grid gap-x-4 sm:grid-cols-2">
          {!several && (
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
          )}
          <TextField
            name="file"
            label={scripted ? 'Files' : 'File'}
            type="file"
            multiple={scripted}
            // A file that was dropped does not stand in the field.
            required={files.length === 0}
            hint={
              <>
                As the logger wrote it, up to {limitMib} MiB
                {formLimitMib < limitMib && <> ({formLimitMib} MiB where scripts are switched off)</>}.
                {scripted && ' Several can be chosen, or dropped here.'}
              </>
            }
            errors={[
              ...tooLarge.map(
                ({ file }) =>
                  `${file.name} has ${sizeText(file.size)}; at most ${limitMib} MiB are taken. Split it at a line end.`,
              ),
              ...(shown?.fields.file ?? []),
            ]}
            onChange={(event) => choose(event.target.files)}
          />
        </div>
        {several ? (
          <ChosenFiles
            files={files}
            sources={sources}
            states={uploads.states}
            busy={busy}
            onSource={(key, chosen) =>
              setFiles(files.map((one) => (one.key === key ? { ...one, source: chosen } : one)))
            }
          />
        ) : (
          only !== undefined && <p className="mb-3 text-sm text-ink-2">{only.file.name}</p>
        )}
        <div className="flex flex-wrap items-center gap-3">
          <Button kind="primary" disabled={busy}>
            {several ? `Send and read ${files.length} files` : 'Send and read'}
          </Button>
          {uploads.busy && (
            <Button type="button" onClick={uploads.stop}>
              Stop
            </Button>
          )}
        </div>
        {(state?.kind === 'sending' || state?.kind === 'broken' || state?.kind === 'reading') && (
          <div className="mt-3" role="status">
            <SendingBar state={state} />
          </div>
        )}
      </Form>
    </>
  )
}
