import { readFileSync } from 'node:fs'
import { describe, expect, test } from 'vitest'

/** WCAG 2.2, success criteria 1.4.3 (text, 4.5 to 1) and 1.4.11 (parts of controls and charts, 3 to 1). */
const css = readFileSync(new URL('../../../app/app.css', import.meta.url), 'utf8')

function tokens(theme: 'light' | 'dark'): Record<string, string> {
  const found = [...css.matchAll(/--color-([\w-]+): light-dark\((#\w{6}), (#\w{6})\)/g)]
  return Object.fromEntries(found.map(([, name, light, dark]) => [name, theme === 'light' ? light : dark]))
}

/** Relative luminance as WCAG 2.2 defines it. */
function luminance(hex: string): number {
  const [r, g, b] = [1, 3, 5].map((at) => {
    const share = Number.parseInt(hex.slice(at, at + 2), 16) / 255
    return share <= 0.04045 ? share / 12.92 : ((share + 0.055) / 1.055) ** 2.4
  }) as [number, number, number]
  return 0.2126 * r + 0.7152 * g + 0.0722 * b
}

function ratio(a: string, b: string): number {
  const [dark, light] = [luminance(a), luminance(b)].sort((x, y) => x - y) as [number, number]
  return (light + 0.05) / (dark + 0.05)
}

const TEXT: [string, string][] = [
  ...['ink', 'ink-2', 'ink-3', 'vac', 'heat', 'warn', 'bad'].flatMap((text): [string, string][] => [
    [text, 'paper'],
    [text, 'sheet'],
  ]),
  ['ink', 'rule-2'],
  ['ink-2', 'rule-2'],
  ['ink', 'vac-soft'],
  ['vac', 'vac-soft'],
  ['ink', 'heat-soft'],
  ['heat', 'heat-soft'],
  ['ink', 'warn-soft'],
  ['warn', 'warn-soft'],
  ['ink', 'bad-soft'],
  ['bad', 'bad-soft'],
  ['sheet', 'ink'],
  ['sheet', 'heat'],
  ['sheet', 'bad'],
  ['sheet', 'vac'],
]

const PARTS: [string, string][] = [
  ['edge', 'sheet'],
  ['edge', 'paper'],
  ['ink-3', 'vac-soft'],
  ['vac', 'heat-soft'],
]

describe.each(['light', 'dark'] as const)('the %s set', (theme) => {
  const set = tokens(theme)

  test.each(TEXT)('shows %s on %s at 4.5 to 1 or better', (front, back) => {
    expect(ratio(set[front] ?? '', set[back] ?? '')).toBeGreaterThanOrEqual(4.5)
  })

  test.each(PARTS)('shows a part in %s on %s at 3 to 1 or better', (front, back) => {
    expect(ratio(set[front] ?? '', set[back] ?? '')).toBeGreaterThanOrEqual(3)
  })
})

test('measures black on white as 21 to 1 (WCAG 2.2, definition of contrast ratio)', () => {
  expect(ratio('#000000', '#ffffff')).toBeCloseTo(21, 10)
})
