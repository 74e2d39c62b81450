/** Whether waiting can reach the target, and the bake that would. */
import { Link } from 'react-router'
import { Facts, Panel } from '#app/components/ui/panel.tsx'
import { Pressure } from '#app/components/ui/pressure.tsx'
import { SEGMENT_STATES } from '#app/domain/segment-states.ts'
import type { SegmentPageProps } from './segment-page.tsx'

/** Waiting this long is no plan. */
const PATIENCE_HOURS = 24 * 60

export function BakePanel({ bake, forecast, segment, standing }: SegmentPageProps) {
  // While heat is on, what matters is the bake that runs, not one that could be planned.
  if (bake === null || SEGMENT_STATES[segment.state].hot) return null
  const { answer } = bake
  return (
    <Panel
      title={`A bake at ${bake.bakeC} °C`}
      aside={
        <Link to={`/bakes/options?segments=${segment.tag}`} className="link">
          Other temperatures
        </Link>
      }
    >
      {forecast !== null && <NeedsBake forecast={forecast} targetPa={bake.targetPa} />}
      {standing.verdict === 'at-target' && (
        <p className="mb-2 text-ink-2">The segment is at its target; no bake is called for.</p>
      )}
      {answer?.soak == null ? (
        <p>
          By the model no bake at {bake.bakeC} °C brings the ends to <Pressure pa={bake.targetPa} /> with the
          pump this segment has, or the register lacks what the model needs (pump speed, hydrogen content).
        </p>
      ) : (
        <Facts
          items={[
            { name: 'Target at the ends', value: <Pressure pa={bake.targetPa} /> },
            { name: 'Soak needed', value: <Soak {...answer} /> },
            {
              name: 'What decides it',
              value: answer.soak.limitedBy === 'water' ? 'water on the wall' : 'hydrogen in the steel',
            },
          ]}
        />
      )}
      {answer !== null && answer.hydrogenTimes > 1 && (
        <p className="mt-2 text-warn">
          The cross reads {answer.hydrogenTimes.toFixed(1)} times what the register's hydrogen gives. The soak
          above takes all of it for hydrogen; a leak would not yield to a bake. Find out which it is first.
        </p>
      )}
      <p className="mt-2 text-sm text-ink-3">
        Closed forms from the register's steel and pump, cooled to 20 °C; hydrogen in {segment.steel}:{' '}
        {segment.hydrogenOrigin}. Diffusion in steel is known to a factor of about two, so is this length. No
        plan and no permit to heat.
      </p>
    </Panel>
  )
}

/** One length, or two where it turns on how long the steel has lain since the mill. */
function Soak({ soak, soakAtBest }: NonNullable<NonNullable<SegmentPageProps['bake']>['answer']>) {
  if (soak === null) return null
  const best = soakAtBest === null ? null : soakText(soakAtBest.hours)
  return (
    <>
      {soakText(soak.hours)}
      {best !== null && best !== soakText(soak.hours) && (
        <span className="block text-sm font-normal text-ink-2">
          {best} if the steel lay ten years since the mill
        </span>
      )}
    </>
  )
}

function soakText(hours: number): string {
  if (hours < 1) return 'the ramp alone'
  return hours < 72 ? `${Math.ceil(hours)} h` : `${Math.ceil(hours)} h (${(hours / 24).toFixed(1)} days)`
}

function NeedsBake({
  forecast,
  targetPa,
}: {
  forecast: NonNullable<SegmentPageProps['forecast']>
  targetPa: number
}) {
  const { target } = forecast
  if (target === null) return null
  const { result, fastestHours } = target
  const soonest = result.kind === 'forecast' ? result.hours : fastestHours
  if (soonest === null)
    return <p className="mb-2 text-ink-2">Whether pumping alone can do it cannot be told yet.</p>
  const days = Math.round(soonest / 24)
  if (soonest < PATIENCE_HOURS) {
    return (
      <p className="mb-2">Pumping alone may reach the target after {days} days; a bake would be sooner.</p>
    )
  }
  return (
    <p className="mb-2">
      <strong>The target needs a bake.</strong> Pumping alone would take{' '}
      {result.kind === 'forecast' ? 'about' : 'at the very least'} {days} days to come down to{' '}
      <Pressure pa={targetPa} />
      {result.kind === 'forecast' ? '.' : ', if no constant part of the gas stops it before.'}
    </p>
  )
}
