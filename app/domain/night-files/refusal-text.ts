import type { Finding } from './types.ts'

/** Where something is, as people say it: `line 3, field 2`; empty when it concerns the whole file. */
export function placeText({ line, column }: Pick<Finding, 'line' | 'column'>): string {
  if (line === null) return ''
  return column === null ? `line ${line}` : `line ${line}, field ${column}`
}

/** A finding in one sentence: where, what was found, what was expected, how to mend it. */
export function findingText(finding: Finding): string {
  const place = placeText(finding)
  const found = place === '' ? `Found ${finding.found}` : `In ${place}: found ${finding.found}`
  return `${found}; expected ${finding.expected}. ${finding.mend}`
}
