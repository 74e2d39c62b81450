import { data } from 'react-router'
import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { IntakePage } from '#app/components/intake/intake-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { env } from '#app/env.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { FORM_LIMIT_MIB, fileFromForm, receiveFile } from '#app/server/upload.server.ts'
import { readIntakePage } from '#app/services/intake-pages.server.ts'
import { readUnfinished } from '#app/services/uploads.server.ts'
import type { Route } from './+types/intake'

export function meta() {
  return [{ title: 'Log intake · Ebbline' }]
}

export async function loader({ context, request }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const [page, unfinished] = await Promise.all([
    readIntakePage(getDb(), actor, nowOf(context)),
    readUnfinished(getDb(), actor),
  ])
  const limitMib = env().MAX_NIGHT_FILE_MIB
  return { ...page, unfinished, limitMib, formLimitMib: Math.min(limitMib, FORM_LIMIT_MIB) }
}

export async function action({ context, request }: Route.ActionArgs) {
  const actor = permitted(context, request, 'intake:take-in')
  const limitMib = env().MAX_NIGHT_FILE_MIB
  const answer = await receiveFile(getDb(), actor, nowOf(context), () => fileFromForm(request, limitMib))
  if (!answer.ok) return data(answer.failure, { status: answer.status })
  return redirectWithNotice(
    `/intake/${answer.importId}`,
    answer.again
      ? 'These bytes were waiting here already. Nothing was added.'
      : answer.reading
        ? 'File received; the worker reads it now.'
        : 'File received and read. Look through it before you take it in.',
  )
}

export default function IntakeRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <IntakePage {...loaderData} failure={actionData} />
}
