/** The form of a heated-segment permit: nine sections, saved while it is typed, and plain HTML without script. */
import { zodResolver } from '@hookform/resolvers/zod'
import { useEffect, useMemo, useRef, useState } from 'react'
import { FormProvider, useForm } from 'react-hook-form'
import { Link, useNavigate } from 'react-router'
import type { z } from 'zod'
import type { FieldErrors } from '#app/domain/errors.ts'
import type { PermitContent } from '#app/domain/permit-content.ts'
import type { MissingPart } from '#app/domain/permit-facts.ts'
import type { PermitFormValues } from '#app/domain/permit-form-values.ts'
import { PERMIT_SECTION_LABELS, PERMIT_SECTIONS, type PermitSection } from '#app/domain/permit-words.ts'
import { permitFormSchema } from '#app/domain/schemas/permit-form.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { PermitFormAnswer, PermitFormData } from '#app/services/permit-form.server.ts'
import { Button, ButtonLink } from '../ui/button.tsx'
import { TextAreaField } from '../ui/field.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { siteTimeText } from '../ui/site-time.ts'
import { HazardAnswers } from './hazard-answers.tsx'
import { forgetText, type KeptText, keptText } from './kept-text.ts'
import { PermitFieldsProvider } from './permit-fields.tsx'
import { ChangedMeanwhile, type Fault, FaultList, MissingList, SaveWords } from './permit-form-notices.tsx'
import {
  IdentityFields,
  PeopleFields,
  PlaceFields,
  ProtectionFields,
  ValidityFields,
  WorkFields,
} from './permit-form-sections.tsx'
import { ContactRows, PointRows, TestRows } from './permit-rows.tsx'
import { usePermitSaving } from './use-permit-saving.ts'

export interface PermitFormPageProps extends PermitFormData {
  /** Whether what is missing is listed at the top. */
  checking: boolean
  /** What the server answered to a form that was sent without script. */
  answer: PermitFormAnswer | undefined
}

export function PermitFormPage(props: PermitFormPageProps) {
  const { number, title, mode } = props
  // Saving new terms closes the permit to more of them: the form stays until it has led on to the permit.
  const [first] = useState({ number, open: mode !== 'closed' })
  const opened = first.open && first.number === number
  return (
    <>
      <PageHead
        title={mode === 'closed' ? `Permit ${number}` : `Edit permit ${number}`}
        crumbs={
          <>
            <Link to="/permits" className="link">
              Permits
            </Link>
            {' / '}
            <Link to={`/permits/${number}`} className="link">
              {number}
            </Link>
          </>
        }
        actions={<ButtonLink to={`/permits/${number}`}>See the permit</ButtonLink>}
      >
        {title === '' ? 'No title so far.' : title}
      </PageHead>
      {mode !== 'free' && <Notice tone={mode === 'closed' ? 'warn' : 'heat'}>{props.modeText}</Notice>}
      {/* Text that was sent comes back even where the permit has been closed to it meanwhile. */}
      {(mode !== 'closed' || opened || hasText(props.answer)) && <OpenForm key={number} {...props} />}
    </>
  )
}

/** An answer that brings back what was sent. */
function hasText(
  answer: PermitFormAnswer | undefined,
): answer is Extract<PermitFormAnswer, { values: PermitFormValues }> {
  return answer !== undefined && 'values' in answer
}

function OpenForm(props: PermitFormPageProps) {
  const { number, personId, mode, hazards } = props
  const { zone, now } = useSite()
  const navigate = useNavigate()
  const schema = useMemo(() => permitFormSchema(zone), [zone])
  // What the page came with: the loader's newer values must not slip under what is being typed.
  const [start] = useState(() => (hasText(props.answer) ? props.answer.values : props.values))
  const [opened] = useState(() => now.toISOString())
  const form = useForm<PermitFormValues, unknown, PermitContent>({
    defaultValues: start,
    // The schema takes more than the form sends: a name left out, and a single box's own value.
    resolver: zodResolver(schema as z.ZodType<PermitContent, PermitFormValues>),
    mode: 'onTouched',
    shouldFocusError: false,
  })
  const element = useRef<HTMLFormElement>(null)
  const sentBasis = hasText(props.answer) ? props.answer : props
  const saving = usePermitSaving(form, element, {
    number,
    personId,
    zone,
    opened,
    basis: { revision: sentBasis.revision, version: sentBasis.version },
    missing: props.missing,
    hazardKeys: hazards.map(({ key }) => key),
    asTyped: mode === 'free',
  })
  const answer = saving.answer ?? props.answer
  const [faults, setFaults] = useState<readonly Fault[]>([])
  const [checking, setChecking] = useState(props.checking)
  const kept = useKept(number, personId, start)

  function onSubmit(event: React.FormEvent<HTMLFormElement>) {
    const pressed = (event.nativeEvent as SubmitEvent).submitter
    const intent = pressed instanceof HTMLButtonElement ? pressed.value : 'save'
    event.preventDefault()
    void form.handleSubmit(() => {
      setFaults([])
      saving.save(() => {
        if (mode === 'change-terms') void navigate(`/permits/${number}`)
        else if (intent === 'request') void navigate(`/permits/${number}?act=request#act`)
        else setChecking(intent === 'check')
      })
    })()
    const read = schema.safeParse(form.getValues())
    setFaults(
      read.success
        ? []
        : read.error.issues.map(({ path, message }) => ({ field: path.join('.'), text: message })),
    )
  }

  const refused = answer?.kind === 'refused' ? answer : undefined
  const shownFaults = useMemo(
    () => (faults.length > 0 ? faults : faultsOf(refused?.fields ?? {})),
    [faults, refused],
  )
  return (
    <FormProvider {...form}>
      <PermitFieldsProvider value={{ values: start, errors: refused?.fields ?? {} }}>
        {kept.text !== null && (
          <KeptNotice
            text={kept.text}
            onTake={(text) => {
              saving.goOnFrom(text.values, text.basis)
              kept.settle()
            }}
            onLeave={() => {
              forgetText(number, personId)
              kept.settle()
            }}
          />
        )}
        {answer?.kind === 'changed' && <ChangedMeanwhile answer={answer} />}
        {saving.status.kind === 'signed-out' && (
          <Notice tone="warn" announce="alert">
            you have been signed out. What you typed is kept in this browser and offered again once you are
            back.{' '}
            <a className="link" href={`/sign-in?next=${encodeURIComponent(`/permits/${number}/edit`)}`}>
              Sign in
            </a>
          </Notice>
        )}
        <FaultList message={refused?.message} faults={shownFaults} />
        {checking && shownFaults.length === 0 && <MissingList missing={saving.missing} number={number} />}
        <form ref={element} method="post" noValidate onSubmit={onSubmit}>
          {/* What the Enter key presses in a field without script: the first button of the form. */}
          <button
            type="submit"
            name="intent"
            value="save"
            className="hidden"
            tabIndex={-1}
            aria-hidden="true"
          >
            Save
          </button>
          <input type="hidden" name="revision" value={saving.basis.revision} />
          <input type="hidden" name="version" value={saving.basis.version} />
          <div className="items-start gap-x-6 lg:grid lg:grid-cols-[15rem_minmax(0,1fr)]">
            <SectionList missing={saving.missing} />
            <div className="min-w-0">
              <Sections {...props} missing={saving.missing} />
              {mode === 'change-terms' && (
                <Panel title="Why the terms change" id="reason">
                  <TextAreaField
                    name="reason"
                    id="field-reason"
                    label="Reason"
                    hint="The officer reads it beside what changed."
                    rows={2}
                    maxLength={1000}
                    defaultValue={hasText(props.answer) ? props.answer.reason : ''}
                    errors={refused?.fields.reason}
                  />
                </Panel>
              )}
              {mode === 'free' && (
                // In the bar there is no room for it on a telephone.
                <Button name="intent" value="request" kind="primary" className="mb-4 md:hidden">
                  Save and go on to request
                </Button>
              )}
              <div
                data-foot-bar
                className="sticky bottom-14 z-10 -mx-1 flex flex-wrap items-center justify-between gap-x-4 gap-y-2 border-t bg-paper px-1 py-2.5 md:bottom-0 print:hidden"
              >
                <SaveWords status={saving.status} asTyped={mode === 'free'} />
                <div className="flex flex-wrap gap-2">
                  {mode === 'free' ? (
                    <>
                      <Button name="intent" value="save">
                        Save
                      </Button>
                      <Button name="intent" value="check">
                        Save and check
                      </Button>
                      <Button name="intent" value="request" kind="primary" className="max-md:hidden">
                        Save and go on to request
                      </Button>
                    </>
                  ) : (
                    <Button name="intent" value="save" kind="danger">
                      Save the change; the approval ends
                    </Button>
                  )}
                </div>
              </div>
            </div>
          </div>
        </form>
      </PermitFieldsProvider>
    </FormProvider>
  )
}

function faultsOf(fields: FieldErrors): Fault[] {
  return Object.entries(fields).flatMap(([field, texts]) => texts.map((text) => ({ field, text })))
}

/** Text of an earlier visit that was never saved; looked for once the page is alive, for the server cannot know of it. */
function useKept(number: string, personId: number, start: PermitFormValues) {
  const [text, setText] = useState<KeptText | null>(null)
  useEffect(() => {
    const found = keptText(number, personId, start)
    if (found === null) return
    if (JSON.stringify(found.values) === JSON.stringify(start)) forgetText(number, personId)
    else setText(found)
  }, [number, personId, start])
  return { text, settle: () => setText(null) }
}

function KeptNotice({
  text,
  onTake,
  onLeave,
}: {
  text: KeptText
  onTake: (text: KeptText) => void
  onLeave: () => void
}) {
  const { zone } = useSite()
  return (
    <Notice tone="warn" announce="status">
      you typed something here that was not saved, on the page you opened{' '}
      {siteTimeText(new Date(text.at), zone)}.
      <span className="mt-2 flex flex-wrap gap-2">
        <Button type="button" onClick={() => onTake(text)}>
          Put it back into the form
        </Button>
        <Button type="button" onClick={onLeave}>
          Throw it away
        </Button>
      </span>
    </Notice>
  )
}

function countOf(missing: readonly MissingPart[], section: PermitSection): string {
  const count = missing.filter((part) => part.section === section).length
  return count === 0 ? 'complete' : `${count} missing`
}

function SectionList({ missing }: { missing: readonly MissingPart[] }) {
  return (
    <nav
      aria-label="Sections of the permit"
      className="mb-4 rounded-md border bg-sheet px-3 py-2 lg:sticky lg:top-4 print:hidden"
    >
      <ol className="grid gap-x-4 sm:grid-cols-2 lg:grid-cols-1">
        {PERMIT_SECTIONS.map((section, index) => {
          const standing = countOf(missing, section)
          return (
            <li key={section}>
              <a
                href={`#section-${section}`}
                className="flex min-h-10 items-center justify-between gap-2 rounded-sm px-1 py-1 hover:bg-rule-2 pointer-coarse:min-h-11"
              >
                <span>
                  {index + 1}. {PERMIT_SECTION_LABELS[section]}
                </span>
                <span className={`shrink-0 text-sm ${standing === 'complete' ? 'text-ink-3' : 'text-warn'}`}>
                  {standing}
                </span>
              </a>
            </li>
          )
        })}
      </ol>
    </nav>
  )
}

function Sections(props: PermitFormPageProps & { missing: readonly MissingPart[] }) {
  const content: Record<PermitSection, React.ReactNode> = {
    identity: <IdentityFields plan={props.plan} />,
    place: <PlaceFields segments={props.segments} />,
    work: <WorkFields supplies={props.supplies} />,
    people: <PeopleFields people={props.people} crewNote={props.plan?.crewNote ?? null} />,
    validity: <ValidityFields />,
    hazards: <HazardAnswers hazards={props.hazards} />,
    isolation: <PointRows />,
    tests: <TestRows />,
    protection: (
      <>
        <ProtectionFields />
        <h3 className="mb-2 font-medium">Whom to call</h3>
        <ContactRows />
      </>
    ),
  }
  return PERMIT_SECTIONS.map((section, index) => (
    <Panel
      key={section}
      id={`section-${section}`}
      title={`${index + 1}. ${PERMIT_SECTION_LABELS[section]}`}
      aside={<span className="text-sm text-ink-3">{countOf(props.missing, section)}</span>}
    >
      {content[section]}
    </Panel>
  ))
}
