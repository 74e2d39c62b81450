/** Bake options: the question, the answer in a picture and in figures, and where the figures come from. */
import { Form, Link, useNavigation } from 'react-router'
import type { BakeOptionRow } from '#app/domain/bake-options.ts'
import type { Doubt } from '#app/domain/bake-options-bands.ts'
import type { BakeOptionsPage } from '#app/services/bake-options.server.ts'
import { Button } from '../ui/button.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { Pressure } from '../ui/pressure.tsx'
import { OptionsPicture } from './options-picture.tsx'
import { AfterTable, LeftTable, OptionsTable } from './options-tables.tsx'

export function OptionsPage({ tags, query, asked, answer, mayPlan }: BakeOptionsPage & { mayPlan: boolean }) {
  const rows = answer?.rows ?? []
  return (
    <>
      <PageHead
        title="Options for a bake"
        crumbs={
          <Link to="/bakes" className="link">
            Bakes
          </Link>
        }
      >
        {asked === null ? (
          'How hot, how long, at what cost'
        ) : (
          <>
            {asked.segments.join(' and ')} to <Pressure pa={asked.targetPa} />
            {asked.targetFromRegister ? ', the target in service' : ''}
          </>
        )}
      </PageHead>
      <Question tags={tags} query={query} />
      {answer !== null && answer.refusal !== null && (
        <Notice tone="warn" announce="status" lead="No option: ">
          {answer.refusal}
        </Notice>
      )}
      {asked !== null && <Remarks asked={asked} />}
      {rows.length > 0 && asked !== null && (
        <>
          <Panel title="Temperature against time">
            <OptionsPicture rows={rows} />
            <p className="mt-2 text-sm text-ink-2">
              Each disc is a bake that meets the target; the larger, the more energy.
            </p>
          </Panel>
          <Panel title="What each asks">
            <OptionsTable rows={rows} planLink={mayPlan ? (row) => planAddress(asked, row) : null} />
            <Cautions rows={rows} />
          </Panel>
          <Panel title="What each leaves behind">
            <AfterTable rows={rows} />
            <Doubts rows={rows} />
          </Panel>
        </>
      )}
      {answer !== null && answer.left.length > 0 && (
        <Panel title="Left out">
          <LeftTable left={answer.left} />
        </Panel>
      )}
      {asked !== null && <Basis asked={asked} />}
    </>
  )
}

function planAddress(
  { segments, upKH, targetPa }: NonNullable<BakeOptionsPage['asked']>,
  row: BakeOptionRow,
): string {
  const params = new URLSearchParams({
    segments: segments.join(','),
    celsius: String(row.celsius),
    hours: String(row.soakHours),
    ramp: String(upKH),
    target: String(targetPa),
  })
  return `/bakes/plans/new?${params}`
}

function Question({ tags, query }: Pick<BakeOptionsPage, 'tags' | 'query'>) {
  const busy = useNavigation().state !== 'idle'
  const [first = '', second = ''] = query.segments
  const none = { value: '', label: 'none' }
  const choices = tags.map((tag) => ({ value: tag, label: tag }))
  return (
    <Panel title="The question" className="print:hidden">
      <Form
        method="get"
        key={`${first} ${second}`}
        className="grid gap-x-4 sm:grid-cols-2 lg:grid-cols-5 lg:items-start"
      >
        <SelectField name="segments" label="Segment" options={[none, ...choices]} defaultValue={first} />
        <SelectField
          name="segments"
          label="In series with"
          options={[none, ...choices]}
          defaultValue={second}
        />
        <TextField
          name="target"
          label="Target, Pa N₂"
          hint="Empty for the target in service."
          defaultValue={query.typed.target}
          errors={query.errors.target}
        />
        <TextField
          name="leak"
          label="Air leak, Pa·m³/s"
          hint="Taken at the west end; empty for none."
          defaultValue={query.typed.leak}
          errors={query.errors.leak}
        />
        <TextField
          name="ramp"
          label="Ramp, °C/h"
          hint="Empty for the site's own."
          defaultValue={query.typed.ramp}
          errors={query.errors.ramp}
        />
        <div className="sm:col-span-2 lg:col-span-5">
          <Button kind="primary" disabled={busy}>
            {busy ? 'Working it out' : 'Work it out'}
          </Button>
        </div>
      </Form>
    </Panel>
  )
}

function Remarks({ asked }: { asked: NonNullable<BakeOptionsPage['asked']> }) {
  return (
    <>
      {asked.hot.length > 0 && (
        <Notice tone="heat">
          {asked.hot.join(' and ')} {asked.hot.length === 1 ? 'is' : 'are'} in a bake at the moment; what
          follows is about another one.
        </Notice>
      )}
      {asked.excess.map(({ segment, times }) => (
        <Notice key={segment} tone="warn">
          {segment} reads {times.toFixed(1)} times what the register's hydrogen gives. All of that is taken
          for hydrogen here. A leak would not yield to a bake: find out which it is first, by the isolation
          tests of{' '}
          <Link to={`/segments/${segment}`} className="link">
            {segment}
          </Link>
          .
        </Notice>
      ))}
    </>
  )
}

function Cautions({ rows }: { rows: readonly BakeOptionRow[] }) {
  const at = new Map<string, number[]>()
  for (const { celsius, cautions } of rows) {
    for (const words of cautions) at.set(words, [...(at.get(words) ?? []), celsius])
  }
  if (at.size === 0) return null
  return (
    <>
      <h3 className="mt-3 font-semibold">To mind</h3>
      <ul className="list-disc pl-5">
        {[...at].map(([words, celsius]) => (
          <li key={words}>
            At {celsius.join(', ')} °C: {words}
          </li>
        ))}
      </ul>
    </>
  )
}

function Doubts({ rows }: { rows: readonly BakeOptionRow[] }) {
  const shown = [rows[0], rows.at(-1)].filter((row, i, all) => row !== undefined && all.indexOf(row) === i)
  return (
    <details className="mt-3">
      <summary className="cursor-pointer font-medium">Where the bands come from</summary>
      <p className="mt-2">
        Each doubt goes through the closed forms alone; together they count as independent, by the root of the
        sum of their squared logarithms. Water is never shown below the floor of what is known.
      </p>
      {shown.map((row) =>
        row?.outcomes.map(({ tag, bands }) => (
          <div key={`${row.celsius} ${tag}`} className="mt-2">
            <h3 className="font-medium">
              {tag} at {row.celsius} °C
            </h3>
            <ul className="list-disc pl-5">
              {bands.doubts.map((doubt) => (
                <li key={`${doubt.gas} ${doubt.words}`}>{doubtText(doubt)}</li>
              ))}
            </ul>
          </div>
        )),
      )}
    </details>
  )
}

function doubtText({ gas, words, down, up }: Doubt): string {
  return `${gas === 'water' ? 'Water' : 'Hydrogen'}: ${words}; ${up.toFixed(1)} times as much at most, ${down.toFixed(1)} times less at least.`
}

function Basis({ asked }: { asked: NonNullable<BakeOptionsPage['asked']> }) {
  return (
    <Panel title="What this rests on">
      <ul className="list-disc pl-5 text-ink-2">
        <li>
          Read at {asked.gauges.map(({ gauge }) => gauge).join(' and ')}, where hydrogen stands highest,
          nitrogen-equivalent, a day after the tube is below {asked.coldC} °C.
        </li>
        <li>
          Ramp of {asked.upKH} °C/h from {asked.ambientC} °C, cooling by itself. The first cart of the
          register pumps while it is hot, the segment's own pump afterwards.
        </li>
        <li>
          Closed forms choose the soak; the full solution of transport and wall, at most five times a
          temperature, confirms or corrects it. Soaks are whole hours.
        </li>
        <li>
          Power and current come from insulation, steel and resistance in the register, three tenths added for
          supports and ends (common practice, no source); blankets count in full. Growth is shared evenly
          among the joints.
        </li>
        <li>
          Each part is judged by its own temperature: surroundings plus its share of the tube's rise. Limits
          of gauge heads are from memory, not verified: the maker's sheet goes before them.
        </li>
        <li>This is no plan and no permit to heat.</li>
      </ul>
    </Panel>
  )
}
