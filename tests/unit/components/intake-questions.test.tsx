import { renderToStaticMarkup } from 'react-dom/server'
import { createMemoryRouter, RouterProvider } from 'react-router'
import { describe, expect, test } from 'vitest'
import { AnswersPanel } from '#app/components/intake/answers-panel.tsx'
import { QuestionsPanel } from '#app/components/intake/decisions.tsx'
import type { ReadOut } from '#app/domain/night-files/types.ts'
import { sentAnswers } from '#app/domain/schemas/import-decision.ts'
import { SiteProvider } from '#app/hooks/use-site.ts'
import { readFlat } from '#tests/fixtures/night-files/read.ts'

function render(children: React.ReactNode): string {
  const site = { zone: 'Europe/Vienna', now: new Date('2026-11-09T07:00:00Z'), unit: 'Pa' as const }
  const element = <SiteProvider value={site}>{children}</SiteProvider>
  return renderToStaticMarkup(<RouterProvider router={createMemoryRouter([{ path: '/', element }])} />)
}

/** A file that counts seconds and says no start, with a pressure of which nothing is known about the gas. */
async function elapsed(fileName?: string): Promise<ReadOut> {
  const { out } = await readFlat(
    '# Unit: Pa\n# Zone: Europe/Vienna\nelapsed_s,HC-01A\n0,6e-8\n60,6.1e-8\n',
    null,
    {
      ...(fileName === undefined ? {} : { fileName }),
      answers: [{ id: 'zone', choice: 'Europe/Vienna' }],
    },
  )
  return out
}

describe('a question about a time', () => {
  test('without anything to choose from is a field to type in', async () => {
    const readOut = await elapsed()
    expect(readOut.questions.map(({ id, choices }) => [id, choices.length])).toEqual([['start', 0]])
    const html = render(<QuestionsPanel readOut={readOut} failure={undefined} />)
    expect(html).toContain('name="typed-answer:start"')
    expect(html).not.toContain('<select')
  })

  test('with proposals is a list and a field, and keeps what was typed when it is refused', async () => {
    const readOut = await elapsed('night_2026-11-02_0600.csv')
    const typed = { 'typed-answer:start': 'yesterday' }
    const failure = { ok: false as const, message: 'no time', fields: {}, typed }
    const html = render(<QuestionsPanel readOut={readOut} failure={failure} />)
    expect(html).toContain('name="answer:start"')
    expect(html).toMatch(
      /name="typed-answer:start"[^>]*value="yesterday"|value="yesterday"[^>]*name="typed-answer:start"/,
    )
  })
})

test('a question that leaves nothing out does not say so', async () => {
  const { out } = await readFlat(
    'time,HC-01A (Pa)\n2026-11-08T06:00:00Z,6e-8\n2026-11-08T06:01:00Z,6.1e-8\n',
    null,
  )
  expect(out.questions.map(({ id }) => id)).toContain('basis')
  const html = render(<QuestionsPanel readOut={out} failure={undefined} />)
  expect(html).toContain('Not answered: stored as written')
  expect(html).not.toContain('Not answered: left out')
})

test('answers show what was asked, what was chosen, by whom and when', async () => {
  const readOut = await elapsed()
  const answers = [
    {
      id: 'unit',
      choice: 'Torr',
      label: 'Torr, 133.322 Pa',
      text: 'In which unit?',
      by: 'Tilda Weir',
      at: '2026-11-09T06:00:00.000Z',
    },
  ]
  const html = render(<AnswersPanel readOut={{ ...readOut, answers }} />)
  for (const part of ['In which unit?', 'Torr, 133.322 Pa', 'Tilda Weir', '9 Nov 2026, 07:00'])
    expect(html).toContain(part)
})

describe('a sent form', () => {
  test('has one answer per question: what is typed counts instead of what is chosen', () => {
    expect(
      sentAnswers({
        intent: 'answer',
        'answer:unit': 'Torr',
        'answer:start': '2026-11-02T05:00:00.000Z',
        'typed-answer:start': ' 2026-11-02 07:00 ',
        'answer:zone': '',
      }),
    ).toEqual([
      { id: 'unit', choice: 'Torr' },
      { id: 'start', choice: '2026-11-02 07:00' },
    ])
  })

  test('keeps the choice where nothing is typed', () => {
    expect(sentAnswers({ 'answer:start': 'A', 'typed-answer:start': ' ' })).toEqual([
      { id: 'start', choice: 'A' },
    ])
  })
})
