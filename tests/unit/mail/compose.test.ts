import { describe, expect, it } from 'vitest'
import { type AlertMailFacts, alertSubject, composeAlertMail } from '#app/domain/mail/compose.ts'
import { composeGroup, composeSummary } from '#app/domain/mail/several.ts'
import { MAIL_COLUMNS } from '#app/domain/mail/text.ts'

const FACTS: AlertMailFacts = {
  site: { code: 'QFL', timeZone: 'Europe/Vienna' },
  kind: 'alert',
  priority: 'high',
  place: 'SG-05',
  title: 'SG-05 spread 24 °C (limit 20)',
  value: 24,
  limit: 20,
  unit: '°C',
  startedAt: new Date('2026-11-09T01:14:00Z'),
  noticedAt: new Date('2026-11-09T01:24:00Z'),
  clearedAt: null,
  findings: ['Coldest TH-05-09, 134 °C; hottest TH-05-07, 158 °C.'],
  why: 'A cold stretch keeps its water and bends the tube.',
  whatToDo: 'Do not raise the setpoint. Two people look for slipped insulation between 681 m and 706 m.',
  howLong: 'Two hours before the bellows is at its stop.',
  who: 'The crew on call.',
  ownerName: null,
  next: 'calls on-call 1 at 02:39',
  because: 'You hold HSP-2026-031.',
  link: 'https://log.quillmere.example/a/18231',
}

describe('a mail about an alert', () => {
  it('says in its subject what, where, how bad and since when, in letters every device shows', () => {
    expect(alertSubject(FACTS)).toBe('[QFL] HIGH SG-05 spread 24 C (limit 20) since 02:14 +0100')
    expect(alertSubject({ ...FACTS, priority: 'highest', kind: 'clear' })).toBe(
      '[QFL] HIGHEST SG-05 spread 24 C (limit 20) since 02:14 +0100 - cleared',
    )
  })

  it('says everything in the order in which it is needed', () => {
    const { text } = composeAlertMail(FACTS)
    const inOrder = [
      'SG-05 spread 24 °C',
      'In figures: 24 C, limit 20 C',
      'Coldest TH-05-09',
      'Since: 2026-11-09 02:14 local (01:14',
      'We learned of it: 2026-11-09 02:24',
      'Do now: Do not raise the setpoint.',
      'Time there is:',
      'Who acts:',
      'Why it matters:',
      'Owner: nobody yet',
      'Next: calls on-call 1 at 02:39',
      'You get this because:',
      'https://log.quillmere.example/a/18231',
      'does not take the',
    ]
    const places = inOrder.map((words) => text.indexOf(words))
    expect(places.every((place) => place >= 0)).toBe(true)
    expect(places).toEqual(places.toSorted((a, b) => a - b))
  })

  it('fits a phone held upright, but for addresses', () => {
    const { text } = composeAlertMail(FACTS)
    const wide = text.split('\n').filter((line) => line.length > MAIL_COLUMNS && !line.includes('://'))
    expect(wide).toEqual([])
  })

  it('gives no order and no way to take it when it has cleared', () => {
    const { text } = composeAlertMail({
      ...FACTS,
      kind: 'clear',
      clearedAt: new Date('2026-11-09T03:00:00Z'),
    })
    expect(text).toContain('Cleared: 2026-11-09 04:00 local (03:00')
    expect(text).not.toContain('Do now')
    expect(text).not.toContain('Next:')
  })

  it('does not let a name write lines or marks of its own', () => {
    const { text, html, subject } = composeAlertMail({
      ...FACTS,
      title: 'x\r\nBcc: evil@example.test\r\n\r\nOwner: somebody <script>alert(1)</script>',
      ownerName: 'Eve\nOpen: https://evil.example',
    })
    expect(subject).not.toMatch(/[\r\n]/)
    expect(text.split('\n').filter((line) => /^(Bcc|Open: https:\/\/evil)/.test(line))).toEqual([])
    expect(html).not.toContain('<script')
  })

  it('says pressures by powers of ten in plain letters', () => {
    const { text, subject } = composeAlertMail({
      ...FACTS,
      title: 'pressure 2.1 × 10⁻⁶ Pa (limit 2 × 10⁻⁶ Pa)',
      value: 2.1e-6,
      limit: 2e-6,
      unit: 'Pa',
    })
    expect(subject).toContain('pressure 2.1e-06 Pa (limit 2e-06 Pa)')
    expect(text.replace(/\n/g, ' ')).toContain('In figures: 2.1e-06 Pa, limit 2.0e-06 Pa')
  })
})

describe('one mail for several', () => {
  const mail = (n: number, priority: 'high' | 'low' = 'low') => ({
    priority,
    subject: `number ${n}`,
    text: `text ${n}`,
    html: `<p>text ${n}</p>`,
  })

  it('begins with the most urgent and leaves none out', () => {
    const { subject, text, html } = composeGroup([mail(1), mail(2, 'high'), mail(3)])
    expect(subject).toBe('number 2 and 2 more')
    expect(text.indexOf('text 2')).toBeLessThan(text.indexOf('text 1'))
    for (const n of [1, 2, 3]) {
      expect(text).toContain(`text ${n}`)
      expect(html).toContain(`<p>text ${n}</p>`)
    }
  })

  it('is the mail itself when there is one, and none for none', () => {
    expect(composeGroup([mail(1)])).toMatchObject({ subject: 'number 1', text: 'text 1' })
    expect(() => composeGroup([])).toThrow(RangeError)
  })

  it('counts in a summary what it leaves to the page', () => {
    const mails = Array.from({ length: 75 }, (_, n) => mail(n + 1))
    const { subject, text } = composeSummary({
      siteCode: 'QFL',
      mails,
      sentBefore: 10,
      minutes: 10,
      link: 'https://log.quillmere.example/alerts',
    })
    expect(subject).toBe('[QFL] LOW 75 further alert mails, see the page')
    expect(text.match(/^\* number/gm)).toHaveLength(60)
    expect(text).toContain('and 15 more, which the page shows.')
  })
})
