/** What changed between two versions of a plan, in words. */
import type { BakePlanContent } from './bake-plan.ts'

interface Compared {
  label: string
  text: (content: BakePlanContent) => string
}

function hoursText(hours: number): string {
  return `${hours} h`
}

function paText(pa: number): string {
  return `${pa.toExponential(1)} Pa`
}

function coolingText({ cooling }: BakePlanContent): string {
  return cooling.kind === 'natural' ? 'by itself' : `held to ${cooling.downKH} °C/h`
}

const COMPARED: readonly Compared[] = [
  { label: 'Segments', text: ({ segments }) => segments.join(' + ') },
  { label: 'Start of heating', text: ({ startsAt }) => startsAt ?? 'open' },
  { label: 'Preparation', text: ({ prepHours }) => hoursText(prepHours) },
  { label: 'Bake temperature', text: ({ celsius }) => `${celsius} °C` },
  { label: 'Ramp', text: ({ upKH }) => `${upKH} °C/h` },
  { label: 'Ramp holds above', text: ({ holdPa }) => paText(holdPa) },
  { label: 'Heating off above', text: ({ abortPa }) => (abortPa === null ? 'not set' : paText(abortPa)) },
  { label: 'Spread along the tube', text: ({ spreadK }) => `at most ${spreadK} °C` },
  { label: 'Soak', text: ({ soakHours }) => hoursText(soakHours) },
  { label: 'Soak ends at a fall of less than', text: ({ soakEnd }) => `${soakEnd.fallPercent} % in 12 h` },
  {
    label: 'Soak ends with water',
    text: ({ soakEnd }) => (soakEnd.waterBehind ? 'below hydrogen' : 'of any share'),
  },
  { label: 'Cooling', text: coolingText },
  { label: 'Change of pumps at', text: ({ pumpChangeC }) => `${pumpChangeC} °C` },
  { label: 'Cold below', text: ({ coldC }) => `${coldC} °C` },
  { label: 'Post-bake test', text: ({ testHours }) => hoursText(testHours) },
  { label: 'Supply set', text: ({ supply }) => supply ?? 'none' },
  { label: 'Cart', text: ({ cart }) => cart ?? 'none' },
  { label: 'Target', text: ({ targetPa }) => paText(targetPa) },
  { label: 'Remarks', text: ({ remarks }) => (remarks === '' ? 'none' : `“${remarks}”`) },
]

/** One sentence for each field that differs; none for equal versions. */
export function differences(before: BakePlanContent, after: BakePlanContent): string[] {
  return COMPARED.flatMap(({ label, text }) => {
    const was = text(before)
    const is = text(after)
    return was === is ? [] : [`${label}: ${was} → ${is}`]
  })
}
