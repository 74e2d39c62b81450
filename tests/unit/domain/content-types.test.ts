import { expect, test } from 'vitest'
import { cleanFileName, contentTypeOf } from '#app/domain/content-types.ts'

const bytes = (...values: (number | string)[]) =>
  Uint8Array.from(
    values.flatMap((value) =>
      typeof value === 'number' ? [value] : [...value].map((letter) => letter.charCodeAt(0)),
    ),
  )

test.each([
  ['a PNG', bytes(0x89, 'PNG\r\n', 0x1a, '\n', 0, 0, 0, 13), 'image/png'],
  ['a JPEG', bytes(0xff, 0xd8, 0xff, 0xe1, 0, 24), 'image/jpeg'],
  ['a WebP', bytes('RIFF', 36, 0, 0, 0, 'WEBPVP8 '), 'image/webp'],
  ['a PDF', bytes('%PDF-1.7\n%', 0xe2, 0xe3), 'application/pdf'],
  ['rows of text', bytes('Zeit;HC-01B\r\n09.11.2026 06:00;5,1E-10\r\n'), 'text/plain'],
  ['text in an old code page', bytes('Temperatur ', 0xb0, 'C\t', 0xe4, '\n'), 'text/plain'],
  ['UTF-16 with its mark', bytes(0xff, 0xfe, 'Z', 0, 'e', 0), 'text/plain'],
  ['a RIFF container of something else', bytes('RIFF', 36, 0, 0, 0, 'WAVEfmt '), null],
  ['a PNG cut short', bytes(0x89, 'PNG'), 'text/plain'],
  ['a zip', bytes('PK', 3, 4, 20, 0), null],
  ['a program', bytes(0x7f, 'ELF', 2, 1, 1), null],
  ['nothing', bytes(), null],
])('tells %s by its bytes', (_what, head, expected) => {
  expect(contentTypeOf(head)).toBe(expected)
})

test('a control byte beyond the first 64 KiB does not matter, one before does', () => {
  const text = new Uint8Array(70_000).fill(0x41)
  text[69_000] = 0
  expect(contentTypeOf(text)).toBe('text/plain')
  text[100] = 0
  expect(contentTypeOf(text)).toBeNull()
})

test.each([
  ['C:\\Users\\pim\\NL-W_2026-11-08.csv', 'NL-W_2026-11-08.csv'],
  ['../../etc/passwd', 'passwd'],
  ['photo\r\nSet-Cookie: x.jpg', 'photoSet-Cookie: x.jpg'],
  ['cross‮gpj.exe', 'crossgpj.exe'],
  ['  Flansch 12 ü.png ', 'Flansch 12 ü.png'],
  ['..', 'unnamed'],
  ['', 'unnamed'],
])('the name %j is kept as %j', (given, kept) => {
  expect(cleanFileName(given)).toBe(kept)
})

test('a very long name keeps its ending', () => {
  const kept = cleanFileName(`${'x'.repeat(400)}-2026-11-08.csv`)
  expect([...kept]).toHaveLength(255)
  expect(kept.endsWith('2026-11-08.csv')).toBe(true)
})
