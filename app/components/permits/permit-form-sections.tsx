/** The sections of the permit form, in the order in which they are worked through. */
import { useFormContext, useWatch } from 'react-hook-form'
import type { PermitFormValues } from '#app/domain/permit-form-values.ts'
import { COMPETENCE_LABELS, type CompetenceKind } from '#app/domain/permit-words.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { PermitFormData, PersonChoice } from '#app/services/permit-form.server.ts'
import { Notice } from '../ui/notice.tsx'
import { dayText } from '../ui/site-time.ts'
import { Boxes, Choice, Figure, Line, Lines, type Option, Radios } from './permit-fields.tsx'
import { RelatedRows } from './permit-rows.tsx'
import { WindowNote } from './window-note.tsx'

const YES_NO: readonly Option[] = [
  { value: 'yes', label: 'Yes' },
  { value: 'no', label: 'No' },
]

export function IdentityFields({ plan }: Pick<PermitFormData, 'plan'>) {
  const { register } = useFormContext<PermitFormValues>()
  return (
    <>
      <Line name="title" label="Title" hint="What is heated and why, in a few words." />
      {plan !== null && (
        <p className="mb-4 text-ink-2">
          Drawn up from version {plan.version} of “{plan.title}”.
          {plan.newest !== plan.version && (
            <strong className="font-semibold text-warn">
              {' '}
              That plan is at version {plan.newest} now: hold the figures here against it.
            </strong>
          )}
        </p>
      )}
      <input type="hidden" {...register('planId')} defaultValue={plan === null ? '' : String(plan.id)} />
      <input
        type="hidden"
        {...register('planVersion')}
        defaultValue={plan === null ? '' : String(plan.version)}
      />
      <h3 className="mb-2 font-medium">Papers that go with it</h3>
      <RelatedRows />
    </>
  )
}

function tagOptions(tags: readonly string[], none: string): Option[] {
  return [{ value: '', label: none }, ...tags.map((tag) => ({ value: tag, label: tag }))]
}

export function PlaceFields({ segments }: Pick<PermitFormData, 'segments'>) {
  return (
    <>
      <div className="grid gap-x-4 sm:grid-cols-2">
        <Choice name="segment" label="Segment" options={tagOptions(segments, 'Choose')} />
        <Choice
          name="second"
          label="In series with"
          options={tagOptions(segments, 'No other segment')}
          hint="One current through both."
        />
        <Figure name="fromM" label="Heated from, m" hint="Chainage of the western end." />
        <Figure name="toM" label="Heated to, m" />
        <Figure name="exclusionWestM" label="Kept clear to the west, m" hint="Beyond the heated stretch." />
        <Figure name="exclusionEastM" label="Kept clear to the east, m" />
      </div>
      <Line name="bays" label="Bays of the tunnel" />
      <Lines
        name="equipment"
        label="Equipment by its tags"
        hint="One a line, or with commas between them."
        rows={4}
      />
    </>
  )
}

export function WorkFields({ supplies }: Pick<PermitFormData, 'supplies'>) {
  return (
    <>
      <Lines name="work" label="What will be done" />
      <Lines
        name="notIncluded"
        label="What is not part of it"
        hint="Say what somebody might take to be covered and is not, such as opening a flange."
      />
      <div className="grid gap-x-4 sm:grid-cols-3">
        <Figure name="maxCelsius" label="Highest temperature, °C" />
        <Figure name="rampKH" label="Fastest ramp, °C/h" />
        <Figure name="soakHours" label="Soak, h" hint="0 for none." />
        <Choice
          name="supply"
          label="Supply set"
          options={[
            { value: '', label: 'None: blankets only' },
            ...supplies.map(({ tag, maxAmps, maxVolts }) => ({
              value: tag,
              label: `${tag} (${maxAmps} A, ${maxVolts} V)`,
            })),
          ]}
        />
        <Figure name="maxAmps" label="Highest current, A" />
        <Figure name="maxVolts" label="Highest voltage under load, V" />
        <Figure
          name="openCircuitVolts"
          label="Open-circuit voltage, V"
          hint="Stands wherever the circuit opens."
        />
      </div>
      <Line name="earthing" label="Earthing of the heating circuit" hint="Where it is earthed, and how." />
      <Radios name="unattended" label="Does heating go on with nobody at the segment?" options={YES_NO} />
      <Line
        name="nightCover"
        label="Night and weekend cover"
        hint="Who it is and how they are reached. Needed where heating goes on unattended."
      />
      <fieldset className="min-w-0 border-l-2 pl-3">
        <legend className="font-medium">Annex for unattended heating</legend>
        <p className="mb-3 text-sm text-ink-2">
          With all three filled in, each revalidation of unattended work holds 24 h instead of 12 h.
        </p>
        <Lines name="annex.alarms" label="Alarms that watch it" rows={2} />
        <Figure name="annex.onCallMinutes" label="On-call pair at the segment within, min" />
        <Lines name="annex.shutOff" label="What shuts it off by itself" rows={2} />
      </fieldset>
    </>
  )
}

/** A person with what of a kind stands against their name. */
function personOptions(people: readonly PersonChoice[], kind: CompetenceKind | null, zone: string): Option[] {
  return people.map(({ id, name, competences, ended }) => {
    const own = competences.filter((one) => one.kind === kind)
    const held = own.map(({ number, endsAt }) => {
      const until = endsAt === null ? 'no end' : `until ${dayText(new Date(endsAt.getTime() - 1), zone)}`
      return number === '' ? until : `${number}, ${until}`
    })
    const notes = [
      ...(ended ? ['account has ended'] : []),
      ...(kind === null ? [] : held.length === 0 ? ['none entered'] : held),
    ]
    return { value: String(id), label: notes.length === 0 ? name : `${name} · ${notes.join('; ')}` }
  })
}

export function PeopleFields({
  people,
  crewNote,
}: Pick<PermitFormData, 'people'> & { crewNote: string | null }) {
  const { zone } = useSite()
  const one = (kind: CompetenceKind): Option[] => [
    { value: '', label: 'Nobody yet' },
    ...personOptions(people, kind, zone),
  ]
  const shown = (kind: CompetenceKind) =>
    `Beside each name: ${COMPETENCE_LABELS[kind].toLowerCase()}, as entered.`
  return (
    <>
      {crewNote !== null && (
        <Notice lead="Suggestion, nothing more: ">
          the bake plan’s checklist says of the crew “{crewNote}”. Nobody is named here until you do it.
        </Notice>
      )}
      <Choice
        name="holderId"
        label="Permit holder"
        options={one('permit-holder')}
        hint={`One person, at the site. ${shown('permit-holder')}`}
      />
      <div className="grid gap-x-4 sm:grid-cols-2">
        <Boxes
          name="deputyIds"
          label="Deputies of the holder"
          hint="Named now, so that a shift can be handed over to them. At most six."
          options={personOptions(people, 'permit-holder', zone)}
        />
        <Boxes
          name="crewIds"
          label="Crew"
          hint="Everybody else who works there."
          options={personOptions(people, null, zone)}
        />
      </div>
      <div className="grid gap-x-4 sm:grid-cols-3">
        <Choice
          name="isolatingPersonId"
          label="Isolating person"
          options={one('isolation')}
          hint={shown('isolation')}
        />
        <Choice
          name="electricianId"
          label="Electrician"
          options={one('electrician-licence')}
          hint={shown('electrician-licence')}
        />
        <Choice
          name="attendantId"
          label="Attendant and fire watch"
          options={one('attendant')}
          hint={shown('attendant')}
        />
      </div>
    </>
  )
}

export function ValidityFields() {
  const { zone } = useSite()
  const { control } = useFormContext<PermitFormValues>()
  const [from, to, unattended] = useWatch({ control, name: ['from', 'to', 'unattended'] })
  const form = `Year-month-day hour:minute, site time (${zone}).`
  return (
    <>
      <div className="grid gap-x-4 sm:grid-cols-2">
        <Line name="from" label="Window begins" hint={form} most={30} />
        <Line
          name="to"
          label="Window ends"
          hint="At most 240 h after it begins, counted as they pass."
          most={30}
        />
      </div>
      <WindowNote from={from} to={to} unattended={unattended === 'yes'} />
      <Line name="shifts" label="Shifts that are covered" hint="Such as day crew A, nights on call." />
    </>
  )
}

export function ProtectionFields() {
  return (
    <>
      <Lines name="protectiveEquipment" label="What people wear" />
      <div className="grid gap-x-4 sm:grid-cols-2">
        <Lines name="barriers" label="Barriers and where they stand" />
        <Lines name="signs" label="Signs" />
        <Lines name="lighting" label="Lighting" />
        <Lines name="rescue" label="Rescue: how somebody is got out, and by whom" />
      </div>
      <Line name="assemblyPoint" label="Assembly point" />
    </>
  )
}
