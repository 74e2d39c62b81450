import { renderToStaticMarkup } from 'react-dom/server'
import { MemoryRouter } from 'react-router'
import { describe, expect, test } from 'vitest'
import { FormFailure } from '#app/components/forms/form-failure.tsx'
import { DataTable } from '#app/components/ui/data-table.tsx'
import { CheckField, TextField } from '#app/components/ui/field.tsx'
import { Instant } from '#app/components/ui/instant.tsx'
import { Pressure } from '#app/components/ui/pressure.tsx'
import { StateMark, StateShape } from '#app/components/ui/state-mark.tsx'
import type { PressureUnit } from '#app/context.ts'
import { SEGMENT_STATE_CODES } from '#app/domain/segment-states.ts'
import { SiteProvider } from '#app/hooks/use-site.ts'

function render(children: React.ReactNode, unit: PressureUnit = 'Pa'): string {
  const site = { zone: 'Europe/Vienna', now: new Date('2026-11-09T07:00:00Z'), unit }
  return renderToStaticMarkup(
    <MemoryRouter>
      <SiteProvider value={site}>{children}</SiteProvider>
    </MemoryRouter>,
  )
}

describe('a pressure on the page', () => {
  test('is set with raised figures, spoken in words and copied as a number', () => {
    const html = render(<Pressure pa={5.1e-8} />)
    expect(html).toContain('5.1\u00a0×\u00a010<sup>−8</sup>\u00a0Pa')
    expect(html).toContain('5.1 times ten to the minus 8 pascal')
    expect(html).toContain('data-copy="5.1e-8"')
  })

  test('follows the unit of the reader', () => {
    expect(render(<Pressure pa={5.1e-8} />, 'mbar')).toContain('10<sup>−10</sup>\u00a0mbar')
  })

  test('that is absent is a dash with its reason, and never a number', () => {
    const text = render(<Pressure pa={null} reason="filament off" />).replace(/<[^>]+>/g, '')
    expect(text).toBe('– filament off')
  })

  test('of zero is a zero and not a dash', () => {
    expect(render(<Pressure pa={0} />)).toContain('0\u00a0Pa')
  })
})

test('an instant is shown in site time and carries UTC for programs', () => {
  const html = render(<Instant at={new Date('2026-11-09T05:00:00Z')} age />)
  expect(html).toContain('9 Nov 2026, 06:00')
  expect(html).toContain('2 h ago')
  expect(html).toContain('dateTime="2026-11-09T05:00:00.000Z"')
})

describe('a field', () => {
  test('points to its hint and to what is wrong, in that order', () => {
    const html = render(<TextField name="reason" label="Why" hint="A few words." errors={['Too short.']} />)
    const described = /aria-describedby="([^"]+)"/.exec(html)?.[1]?.split(' ') ?? []
    expect(described).toHaveLength(2)
    expect(html).toContain(`<p id="${described[0]}"`)
    expect(html).toContain(`<div id="${described[1]}"`)
    expect(html).toContain('aria-invalid="true"')
    expect(html.match(/for="([^"]+)"/)?.[1]).toBe(html.match(/<input[^>]* id="([^"]+)"/)?.[1])
  })

  test('without hint or fault claims neither', () => {
    const html = render(<CheckField name="onChart" label="On the chart" />)
    expect(html).not.toContain('aria-describedby')
    expect(html).not.toContain('aria-invalid')
  })
})

test('a failed form shows its sentence and the faults that belong to no field', () => {
  const failure = { ok: false as const, message: 'Nothing has been saved.', fields: { form: ['Too late.'] } }
  const html = render(<FormFailure failure={failure} />)
  expect(html).toContain('role="alert"')
  expect(html).toContain('Nothing has been saved.')
  expect(html).toContain('Too late.')
})

test('a table names its rows and columns, and says so when it is empty', () => {
  const columns = [
    { key: 'tag', head: 'Segment', rowHead: true, cell: (row: { tag: string }) => row.tag },
    {
      key: 'length',
      head: 'Characters',
      align: 'right' as const,
      cell: (row: { tag: string }) => row.tag.length,
    },
  ]
  const table = (rows: { tag: string }[]) =>
    render(
      <DataTable
        caption="Segments"
        columns={columns}
        rows={rows}
        rowKey={({ tag }) => tag}
        empty="There is none."
      />,
    )
  const html = table([{ tag: 'SG-01' }])
  expect(html).toContain('scope="row"')
  expect(html.match(/scope="col"/g)).toHaveLength(2)
  expect(html).toContain('tabindex="0"')
  expect(table([])).toContain('There is none.')
  expect(table([])).not.toContain('<table')
})

describe('the states of a segment', () => {
  test('have shapes that differ with all colour taken away', () => {
    const shapes = SEGMENT_STATE_CODES.map((state) =>
      render(<StateShape state={state} />).replace(
        /(fill|stroke)-(ink-2|ink-3|vac|heat|warn)/g,
        (_all, part: string) => `${part}-some`,
      ),
    )
    expect(new Set(shapes).size).toBe(SEGMENT_STATE_CODES.length)
  })

  test('always come with their word', () => {
    const words = render(<StateMark state="soak" detail="day 4 of 7" />).replace(/<[^>]*>/g, '')
    expect(words).toBe('Soak, day 4 of 7')
  })
})
