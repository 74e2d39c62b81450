/** What is said of a file that came before under the same name, and what can be done about it. */
import { Form, Link } from 'react-router'
import type { EarlierFile } from '#app/services/intake-earlier.server.ts'
import { Button } from '../ui/button.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { sizeText } from './file-words.ts'

/** Reason that is proposed for discarding a file of which another holds everything. */
export function cutReason(wholeId: number): string {
  return `Cut on its way; import ${wholeId} holds the whole file.`
}

export function EarlierNotice({
  importId,
  earlier,
  mayDecide,
}: {
  importId: number
  earlier: EarlierFile
  mayDecide: boolean
}) {
  const { relation, state } = earlier
  const which = (
    <>
      <Link to={`/intake/${earlier.importId}`} className="link inline-block py-0.5">
        Import {earlier.importId}
      </Link>{' '}
      (same name, {sizeText(earlier.byteSize)}, sent <Instant at={earlier.uploadedAt} />)
    </>
  )
  if (relation === 'whole')
    return (
      <Notice tone="bad" lead="Cut. ">
        This file is the beginning of another. {which} holds the whole of it: discard this one.
      </Notice>
    )
  if (relation === 'other')
    return (
      <Notice tone="warn" lead="Same name. ">
        {which} has other content. Look at both before this one is taken in.
      </Notice>
    )
  return (
    <Notice tone="warn" lead="More than before. ">
      {which} holds only the beginning of this file: it was cut.{' '}
      {state === 'accepted'
        ? 'It has been taken in. Taking this one in adds what was missing and leaves equal readings alone.'
        : 'This one holds all of it.'}
      {state === 'read' && mayDecide && (
        <Form method="post" action={`/intake/${earlier.importId}`} className="mt-2">
          <input type="hidden" name="intent" value="discard" />
          <input type="hidden" name="reason" value={cutReason(importId)} />
          <Button>Discard import {earlier.importId}</Button>
        </Form>
      )}
    </Notice>
  )
}
