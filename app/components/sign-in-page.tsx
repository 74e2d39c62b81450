/** Who are you? In the demo, the invented people of the demo stand ready, one for each role. */
import { Form, useNavigation } from 'react-router'
import { ROLE_LABELS, ROLES } from '#app/domain/roles.ts'
import type { DemoSignIn } from '#app/services/demo-sign-ins.server.ts'
import type { ActionFailure } from './forms/failure.ts'
import { FormFailure } from './forms/form-failure.tsx'
import { BrandMark } from './ui/brand-mark.tsx'
import { Button } from './ui/button.tsx'
import { CheckField, TextField } from './ui/field.tsx'

export function SignInPage({
  demoSignIns,
  failure,
}: {
  demoSignIns: readonly DemoSignIn[]
  failure: ActionFailure | undefined
}) {
  const sending = useNavigation().formMethod === 'POST'
  return (
    <main id="content" className="mx-auto grid max-w-4xl gap-x-12 gap-y-8 px-4 py-10 md:grid-cols-2 md:py-20">
      <div>
        <p className="mb-8 flex items-center gap-2 text-xl font-semibold tracking-head">
          <BrandMark />
          Ebbline
        </p>
        <h1 className="mb-4">Sign in</h1>
        <FormFailure failure={failure} />
        <Form method="post">
          <TextField
            name="email"
            label="E-mail address"
            type="email"
            autoComplete="username"
            defaultValue={failure?.typed?.email}
            required
            errors={failure?.fields.email}
          />
          <TextField
            name="password"
            label="Password"
            type="password"
            autoComplete="current-password"
            required
            errors={failure?.fields.password}
          />
          <CheckField
            name="shared"
            label="This is a shared device"
            hint="You are signed out after 30 minutes without a request, and when the browser is closed; otherwise after 12 hours."
            defaultChecked={failure?.typed?.shared === 'on'}
          />
          <Button kind="primary" disabled={sending}>
            {sending ? 'Signing in' : 'Sign in'}
          </Button>
        </Form>
      </div>
      {demoSignIns.length > 0 && <DemoPeople people={demoSignIns} />}
    </main>
  )
}

/** Each name is a form of its own that signs that person in: one press, and no script needed. */
function DemoPeople({ people }: { people: readonly DemoSignIn[] }) {
  return (
    <section aria-labelledby="demo-people" className="md:pt-15">
      <h2 id="demo-people" className="mb-1 text-xl">
        This is a demo
      </h2>
      <p className="mb-3 text-ink-2">
        The site, its readings and its people are invented. Choose somebody to see the product through their
        eyes.
      </p>
      <ul className="grid gap-2">
        {people.map(({ name, email, role, password }) => (
          <li key={email} className="rounded-md border bg-sheet">
            <Form method="post">
              <input type="hidden" name="email" value={email} />
              <input type="hidden" name="password" value={password} />
              <button
                type="submit"
                className="block min-h-11 w-full rounded-md px-3.5 py-2 text-left hover:bg-rule-2"
              >
                <span className="font-medium">{name}</span>
                <span className="block text-sm text-ink-2">{roleWords(role)}</span>
              </button>
            </Form>
            <p className="border-t border-rule-2 px-3.5 py-1.5 text-sm text-ink-3">
              {email} · {password}
            </p>
          </li>
        ))}
      </ul>
    </section>
  )
}

function roleWords(role: string): string {
  const known = ROLES.find((each) => each === role)
  return known === undefined ? role : ROLE_LABELS[known]
}
