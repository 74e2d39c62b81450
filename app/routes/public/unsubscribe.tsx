import { Form } from 'react-router'
import { nowOf } from '#app/auth/guard.server.ts'
import { Button } from '#app/components/ui/button.tsx'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { readUnsubscribing, unsubscribe } from '#app/services/mail-unsubscribe.server.ts'
import type { Route } from './+types/unsubscribe'

export const meta: Route.MetaFunction = () => [{ title: 'Mail · Ebbline' }]

/** Opening the address changes nothing: programs that look through mail open every link. */
export async function loader({ params }: Route.LoaderArgs) {
  return orRefuse(readUnsubscribing(getDb(), params.token))
}

/** A press on the button, or the mail program's own one click (RFC 8058): no sign-in, the address is the proof. */
export async function action({ context, params }: Route.ActionArgs) {
  return orRefuse(unsubscribe(getDb(), nowOf(context), params.token))
}

const WORDS = {
  digest: { what: 'the daily digest', instead: 'The page of alerts goes on showing all that stands in it.' },
  low: { what: 'alerts of low priority one by one', instead: 'They stand in the daily digest.' },
}

export default function Unsubscribe({ loaderData, actionData }: Route.ComponentProps) {
  const { what, instead } = WORDS[loaderData]
  return (
    <main id="content" className="mx-auto max-w-2xl px-4 py-10">
      <h1 className="mb-4">Mail from Ebbline</h1>
      {actionData === undefined ? (
        <Form method="post">
          <p className="mb-4">
            Send me no more mail with {what}. {instead} Mail that duty asks for still comes.
          </p>
          <Button kind="primary">Send no more of these</Button>
        </Form>
      ) : (
        <p role="status">
          You get no more mail with {what}. {instead} Your account is where you change this.
        </p>
      )}
    </main>
  )
}
