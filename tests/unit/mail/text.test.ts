import { describe, expect, it } from 'vitest'
import {
  bothTimes,
  escapeHtml,
  headerSafe,
  isHeaderName,
  isMailAddress,
  mailDate,
  plainFigures,
  plainValue,
  wrap,
} from '#app/domain/mail/text.ts'

const ZONE = 'Europe/Vienna'

describe('a header', () => {
  it.each([
    ['SG-05\r\nBcc: evil@example.test', 'SG-05 Bcc: evil@example.test'],
    ['one\ntwo\rthree', 'one two three'],
    ['a\u0000b\u0085c\u2028d\u2029e', 'a b c d e'],
    ['gpj\u202egnp', 'gpj gnp'],
    ['  much   room ', 'much room'],
  ])('takes %j as one line', (hostile, safe) => {
    expect(headerSafe(hostile)).toBe(safe)
  })

  it('is cut where it is too long, between letters', () => {
    expect(headerSafe('😀'.repeat(12), 10)).toBe(`${'😀'.repeat(9)}…`)
  })

  it('cannot be one that the sender sets, nor a name that is none', () => {
    for (const name of ['Bcc', 'SUBJECT', 'Message-ID', 'X Y', 'X:Y', 'X\r\nBcc', ''])
      expect(isHeaderName(name)).toBe(false)
    expect(isHeaderName('List-Unsubscribe-Post')).toBe(true)
  })
})

it.each([
  ['corwin@quillmere.example', true],
  ['night.crew+b@vac.quillmere.example', true],
  ['corwin', false],
  ['corwin@localhost', false],
  ['a@b.example, c@d.example', false],
  ['a@b.example\r\nBcc: c@d.example', false],
  ['"a b"@c.example', false],
  ['Corwin <a@b.example>', false],
  ['a@-b.example', false],
  ['a..b@c.example', false],
  [`${'a'.repeat(65)}@b.example`, false],
  [`a@${'b'.repeat(250)}.example`, false],
])('%j is an address: %s', (text, good) => {
  expect(isMailAddress(text)).toBe(good)
})

it('writes figures in plain letters', () => {
  expect(plainFigures('p 2.1 × 10⁻⁷ Pa, limit 2×10⁻⁶ Pa')).toBe('p 2.1e-07 Pa, limit 2e-06 Pa')
  expect(plainFigures('spread 24 °C (limit ≤ 20 °C)')).toBe('spread 24 C (limit <= 20 C)')
  expect(plainFigures('10¹² at −5')).toBe('1012 at -5')
  expect(plainValue(2.1e-7, 'Pa')).toBe('2.1e-07 Pa')
  expect(plainValue(24, '°C')).toBe('24 C')
  expect(plainValue(1083.04, 'A')).toBe('1083 A')
  expect(plainValue(0, '')).toBe('0')
})

it('breaks lines at words and leaves an address whole', () => {
  const link = `https://log.quillmere.example/a/${'1'.repeat(40)}`
  const lines = wrap(`Do not raise the setpoint; two people look for slipped insulation.\n${link}`).split(
    '\n',
  )
  expect(lines).toEqual(['Do not raise the setpoint; two people', 'look for slipped insulation.', link])
})

it('escapes what a page would read as its own', () => {
  expect(escapeHtml(`<a href="x" onclick='y'>&`)).toBe(
    '&lt;a href=&quot;x&quot; onclick=&#39;y&#39;&gt;&amp;',
  )
})

it('says an instant by both clocks, on both sides of the change of clocks', () => {
  expect(bothTimes(new Date('2026-11-09T01:14:00Z'), ZONE)).toBe('2026-11-09 02:14 local (01:14 UTC)')
  expect(bothTimes(new Date('2026-11-08T23:30:00Z'), ZONE)).toBe(
    '2026-11-09 00:30 local (2026-11-08 23:30 UTC)',
  )
  // The hour from 02:00 to 03:00 comes twice on 25 October 2026.
  expect(mailDate(new Date('2026-10-25T00:30:00Z'), ZONE)).toBe('Sun, 25 Oct 2026 02:30:00 +0200')
  expect(mailDate(new Date('2026-10-25T01:30:00Z'), ZONE)).toBe('Sun, 25 Oct 2026 02:30:00 +0100')
})
