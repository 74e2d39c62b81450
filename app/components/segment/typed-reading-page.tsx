/** Typing a reading taken from an instrument at a segment, and the last ones typed there. */
import { Form, Link, useNavigation } from 'react-router'
import { QUANTITIES } from '#app/domain/readings.ts'
import { TYPED_QUANTITIES, TYPED_UNITS, type TypedQuantity } from '#app/domain/schemas/typed-reading.ts'
import type { TypedReadingPageData } from '#app/services/typed-readings.server.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import type { RegisterFailure } from '../register/thing-form.tsx'
import { Button, ButtonLink } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { SelectField, TextAreaField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { offsetLabel, typedTime } from '../ui/site-time.ts'

type Position = TypedReadingPageData['positions'][number]
type Typed = TypedReadingPageData['typed'][number]

const COLUMNS: readonly Column<Typed>[] = [
  { key: 'position', head: 'Position', rowHead: true, cell: ({ position }) => position },
  { key: 'value', head: 'As typed', cell: ({ valueText, unit }) => `${valueText} ${unit}`, nowrap: true },
  { key: 'at', head: 'Read at', cell: ({ at }) => <Instant at={at} /> },
  { key: 'instrument', head: 'From', cell: ({ instrument }) => instrument },
  {
    key: 'typed',
    head: 'Typed by',
    cell: ({ typedBy, typedAt }) => (
      <>
        {typedBy}, <Instant at={typedAt} />
      </>
    ),
  },
  { key: 'note', head: 'Note', cell: ({ note }) => note },
]

export interface TypedReadingPageProps extends TypedReadingPageData {
  /** Position that a link asked for; empty for none. */
  asked: string
  now: Date
  zone: string
  failure: RegisterFailure | undefined
}

export function TypedReadingPage({
  tag,
  positions,
  typed,
  asked,
  now,
  zone,
  failure,
}: TypedReadingPageProps) {
  return (
    <>
      <PageHead
        title={`Type a reading at ${tag}`}
        crumbs={
          <>
            <Link to="/" className="link">
              Line
            </Link>
            {' / '}
            <Link to={`/segments/${tag}`} className="link">
              {tag}
            </Link>
          </>
        }
      >
        What you read from an instrument yourself. It stands beside what the loggers write, marked as typed by
        hand and with your name.
      </PageHead>
      <div className="max-w-2xl">
        <Panel title="Reading">
          {positions.length === 0 ? (
            <p>
              The register has no position at {tag} that can be read by eye. An engineer adds it under{' '}
              <Link to="/register/positions" className="link">
                Register, Positions
              </Link>
              .
            </p>
          ) : (
            <ReadingForm
              // A form that was sent well begins anew.
              key={typed[0]?.id ?? 0}
              tag={tag}
              positions={positions}
              asked={asked}
              now={now}
              zone={zone}
              failure={failure}
            />
          )}
        </Panel>
      </div>
      <Panel title="Typed last">
        <DataTable
          caption={`Readings typed at ${tag}, the last first`}
          columns={COLUMNS}
          rows={typed}
          rowKey={({ id }) => id}
          empty="Nothing has been typed here yet."
        />
      </Panel>
    </>
  )
}

function positionLabel({ tag, quantity, label, chainageM, fitted }: Position): string {
  const place = chainageM === null ? '' : `, ${chainageM} m`
  const where = label === '' ? '' : `, ${label}`
  return `${tag}: ${QUANTITIES[quantity].label.toLowerCase()}${where}${place}${fitted === null ? '' : ` (${fitted})`}`
}

/** Units of the quantities that can be read here, each said with its quantity. */
function unitOptions(positions: readonly Position[]): { value: string; label: string }[] {
  const here = new Set<TypedQuantity>(positions.map(({ quantity }) => quantity))
  return TYPED_QUANTITIES.filter((quantity) => here.has(quantity)).flatMap((quantity) =>
    TYPED_UNITS[quantity].map((unit) => ({
      value: unit,
      label: `${unit} (${QUANTITIES[quantity].label.toLowerCase()})`,
    })),
  )
}

function ReadingForm({ tag, positions, asked, now, zone, failure }: Omit<TypedReadingPageProps, 'typed'>) {
  const sending = useNavigation().formMethod === 'POST'
  const was = failure?.typed
  const first = positions.find((position) => position.tag === asked)
  return (
    <Form method="post">
      <FormFailure failure={failure} />
      <SelectField
        name="position"
        label="Position"
        required
        defaultValue={was?.position ?? first?.tag ?? ''}
        options={[
          { value: '', label: 'Choose' },
          ...positions.map((position) => ({ value: position.tag, label: positionLabel(position) })),
        ]}
        errors={failure?.fields.position}
      />
      <div className="grid gap-x-4 sm:grid-cols-2">
        <TextField
          name="value"
          label="What it shows"
          hint="Such as 2.4e-5 or 150,3; off, >1e-2 or <1e-9 where it shows no number."
          required
          maxLength={40}
          autoComplete="off"
          autoCapitalize="off"
          spellCheck={false}
          defaultValue={was?.value ?? ''}
          errors={failure?.fields.value}
        />
        <SelectField
          name="unit"
          label="Unit that it shows"
          hint={
            first === undefined
              ? undefined
              : `For ${first.tag} a unit of ${QUANTITIES[first.quantity].label.toLowerCase()}.`
          }
          required
          defaultValue={was?.unit ?? ''}
          options={[{ value: '', label: 'Choose' }, ...unitOptions(positions)]}
          errors={failure?.fields.unit}
        />
      </div>
      <TextField
        name="at"
        label="Read at"
        // What was typed comes back after a refusal: the present time in its place would date the reading anew.
        defaultValue={was?.at ?? typedTime(now, zone)}
        autoComplete="off"
        spellCheck={false}
        required
        hint={`Year-month-day hour:minute, site time (${zone}, now ${offsetLabel(now, zone)}).`}
        errors={failure?.fields.at}
      />
      <TextField
        name="instrument"
        label="Instrument"
        hint="Serial number, or what it is. Empty: the one that sits at the position."
        maxLength={80}
        autoComplete="off"
        defaultValue={was?.instrument ?? ''}
        errors={failure?.fields.instrument}
      />
      <TextAreaField
        name="note"
        label="Note"
        rows={2}
        maxLength={500}
        defaultValue={was?.note ?? ''}
        errors={failure?.fields.note}
      />
      <div className="flex flex-wrap gap-2">
        <Button kind="primary" disabled={sending}>
          {sending ? 'Writing down' : 'Write it down'}
        </Button>
        <ButtonLink to={`/segments/${tag}`}>Back to {tag}</ButtonLink>
      </div>
    </Form>
  )
}
